// Sorting and CSV downloads for the tables that carry a name. Nothing of the page depends on it.
(function () {
  "use strict";
  function text(cell) { return cell.textContent.trim(); }
  function value(shown) {
    var number = Number(shown.replace(/\u2212/g, "-").replace(/^n = /, ""));
    return shown === "" ? null : Number.isNaN(number) ? shown : number;
  }
  function compare(a, b) {
    if (a === null || b === null) { return a === b ? 0 : a === null ? 1 : -1; }
    if (typeof a === "number" && typeof b === "number") { return a - b; }
    return String(a).localeCompare(String(b), "en");
  }
  function sort(table, column, header) {
    var down = header.getAttribute("aria-sort") === "ascending";
    var body = table.tBodies[0];
    var rows = Array.from(body.rows).map(function (row) { return { row: row, key: value(text(row.cells[column])) }; });
    rows.sort(function (a, b) {
      var order = compare(a.key, b.key);
      // Empty cells stay last either way.
      return down && a.key !== null && b.key !== null ? -order : order;
    });
    rows.forEach(function (entry) { body.appendChild(entry.row); });
    table.querySelectorAll("thead th").forEach(function (other) { other.removeAttribute("aria-sort"); });
    header.setAttribute("aria-sort", down ? "descending" : "ascending");
  }
  function quoted(cell) { return /[",\n]/.test(cell) ? "\"" + cell.replace(/"/g, "\"\"") + "\"" : cell; }
  function csv(table) {
    return Array.from(table.rows).map(function (row) {
      return Array.from(row.cells).map(function (cell) { return quoted(text(cell)); }).join(",");
    }).join("\n") + "\n";
  }
  function download(table) {
    var link = document.createElement("a");
    link.href = URL.createObjectURL(new Blob([csv(table)], { type: "text/csv" }));
    link.download = table.dataset.name + ".csv";
    link.click();
    URL.revokeObjectURL(link.href);
  }
  document.querySelectorAll("table[data-name]").forEach(function (table) {
    table.querySelectorAll("thead th").forEach(function (header, column) {
      var button = document.createElement("button");
      button.type = "button";
      button.title = "Sort by this column";
      while (header.firstChild) { button.appendChild(header.firstChild); }
      header.appendChild(button);
      button.addEventListener("click", function () { sort(table, column, header); });
    });
    var save = document.createElement("button");
    save.type = "button";
    save.className = "save";
    save.textContent = "Download as CSV";
    save.setAttribute("aria-label", "Download as CSV: " + text(table.caption));
    save.addEventListener("click", function () { download(table); });
    table.parentNode.parentNode.insertBefore(save, table.parentNode);
  });
  // What is folded away should be on paper.
  window.addEventListener("beforeprint", function () {
    document.querySelectorAll("details").forEach(function (part) { part.open = true; });
  });
})();
