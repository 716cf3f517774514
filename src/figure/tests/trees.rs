//! Layout of trees.

use super::super::FigureError;
use super::super::tree::{
    LABELLED_LEAVES, TreeDrawing, TreeMark, TreeNode, compose_tree, tree_picture,
};
use super::assert_text_is_free;

/// Every node of a level has `branches` children.
fn regular(branches: usize, depth: usize) -> TreeDrawing {
    let marks = [
        TreeMark::Plain,
        TreeMark::Framed,
        TreeMark::Filled,
        TreeMark::Falling,
    ];
    let mut nodes = vec![TreeNode::default()];
    let mut above = 0..1;
    for _ in 0..depth {
        let start = nodes.len();
        for parent in above {
            for branch in 0..branches {
                nodes.push(TreeNode {
                    parent: Some(parent),
                    label: ["a", "W", "m"][branch % 3].into(),
                    mark: marks[nodes.len() % 4],
                    note: "+2".into(),
                });
            }
        }
        above = start..nodes.len();
    }
    TreeDrawing {
        nodes,
        axis: "length".into(),
        legend: marks
            .map(|mark| (mark, format!("a {mark:?} node")))
            .to_vec(),
        remark:
            "A remark that is long enough to be broken, because it goes on and on until it has \
                 more than a hundred letters in it."
                .into(),
    }
}

/// The same with wide notes.
fn with_wide_notes(mut tree: TreeDrawing) -> TreeDrawing {
    tree.nodes.iter_mut().for_each(|n| n.note = "+181".into());
    tree
}

#[test]
fn text_of_trees_is_free() {
    for (branches, depth) in [
        (1, 0),
        (1, 1),
        (2, 5),
        (1, 7),
        (1, 9),
        (1, 10),
        (1, 12),
        (1, 30),
        (3, 3),
        (2, 7),
    ] {
        let (canvas, size) = compose_tree(&regular(branches, depth)).expect("a tree");
        assert_text_is_free(&format!("{branches}^{depth}"), &canvas, size);
        assert!(size[0] <= super::super::style::WIDTH + 1.0);
        let wide = with_wide_notes(regular(branches, depth));
        let (canvas, size) = compose_tree(&wide).expect("a tree");
        assert_text_is_free(&format!("{branches}^{depth}, wide"), &canvas, size);
    }
}

#[test]
fn labels_give_way_to_markers() {
    let shows_labels = |tree: &TreeDrawing| {
        let (canvas, _) = compose_tree(tree).expect("a tree");
        canvas.text_boxes().iter().any(|(text, _)| text == "W")
    };
    // A star: the root and its leaves.
    assert!(shows_labels(&regular(LABELLED_LEAVES, 1)));
    assert!(!shows_labels(&regular(LABELLED_LEAVES + 1, 1)));
}

#[test]
fn a_parent_must_come_before_its_children() {
    let node = |parent| TreeNode {
        parent,
        ..TreeNode::default()
    };
    let tree = TreeDrawing {
        nodes: vec![node(None), node(Some(1))],
        ..TreeDrawing::default()
    };
    let fault = tree_picture(&tree, &Default::default()).unwrap_err();
    assert_eq!(
        fault,
        FigureError::NoSuchNode {
            arc: 1,
            node: 1,
            nodes: 1
        }
    );
}
