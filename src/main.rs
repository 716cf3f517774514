use reboundary::*;
fn main(){
    use table::*; use unfold::*; use unfold::engine::*;
    let v=|c:&[(i64,i64)],g:i64|Table::new("",c.iter().map(|&(x,y)|Vector::new(x.into(),y.into())).collect(),g.into(),default_letters(c.len())).unwrap();
    let n:usize=std::env::args().nth(1).unwrap().parse().unwrap();
    let which=std::env::args().nth(2);
    let ctl=run::Control::new();
    for (name,t) in [("square",v(&[(0,0),(1,0),(1,1),(0,1)],1)),("equi",v(&[(0,0),(2,0),(1,1)],3)),("ri",v(&[(0,0),(1,0),(0,1)],1)),("306090",v(&[(0,0),(3,0),(0,1)],3)),("345",v(&[(0,0),(4,0),(0,3)],1)),("L",v(&[(0,0),(2,0),(2,1),(1,1),(1,2),(0,2)],1)),("dart",v(&[(0,0),(4,1),(0,5),(1,2)],1)),("quad",v(&[(0,0),(5,0),(6,3),(1,4)],1))]{
        if let Some(w)=&which { if w!=name {continue;} }
        for ar in [Arithmetic::Tiered, Arithmetic::BigOnly] {
        if ar==Arithmetic::BigOnly && n>14 {continue;}
        let e=AnyEngine::new(&t,n,ar); let m=Mesh::new(&t);
        let t0=std::time::Instant::now();
        let (d,ti)=complexity::diagonals::count(&e,&m,n.max(2)-2,&ctl).unwrap();
        let t1=t0.elapsed();
        let p2=complexity::counts::p_from_diagonals(t.sides() as u64,&d,n);
        println!("{name} {} fans {:?} {:?} {:?}",e.describe(),&p2[p2.len().saturating_sub(20)..],t1,ti);
        if n<=100 {let t0=std::time::Instant::now();
        let (l,ti)=language::walk::grow(&e,&m,n,&ctl).unwrap();
        println!("  beams {} {:?} {:?}",l.complexity()==p2,t0.elapsed(),ti);
        let t0=std::time::Instant::now();
        let g=factor_graph::census::count_graphs(&l,1,3);
        println!("  {:?} {:?} rev {:?}",g.last(), t0.elapsed(), l.first_without_reversal());
        println!("  within {}", g.iter().map(factor_graph::criterion::line_figures).all(|f|f.within_bound));
        let t0=std::time::Instant::now();
        let ms=language::measure::measure(&t,&e,&m,n,2,&ctl).unwrap();
        println!("  {:?} {} {:?} {:?}", ms.levels.iter().all(|l|l.holds), ms.levels.last().unwrap().sum.width().to_f64(), ms.kept.iter().map(|e|e.to_f64()).collect::<Vec<_>>(), t0.elapsed());
}
        }
    }
}
