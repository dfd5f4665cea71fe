"use strict";
// Sorts tables of class "sortable" by the column whose heading is pressed, up and down in turn. The page reads the
// same without it: headings become buttons only here.
(() => {
  const number = (text) => {
    const found = text.replace(/\u2212/g, "-").replace(/[\u202f\u00a0\s]/g, "").match(/^[+-]?\d+(\.\d+)?/);
    return found ? Number(found[0]) : null;
  };
  const valued = (cell) => {
    const text = (cell.firstChild ? cell.firstChild.textContent : "").trim(); // what follows is its range
    const value = number(text);
    return value === null ? text : value;
  };
  const missing = (value) => value === "" || value === "\u2013";

  function compared(a, b) {
    if (missing(a) || missing(b)) return missing(a) - missing(b);
    if (typeof a === "number" && typeof b === "number") return a - b;
    return String(a).localeCompare(String(b));
  }

  for (const table of document.querySelectorAll("table.sortable")) {
    const body = table.tBodies[0];
    const heads = [...table.tHead.rows[table.tHead.rows.length - 1].cells];
    const first = body.rows.length ? body.rows[0].cells.length - heads.length : 0; // heads that span rows stand above
    heads.forEach((head, place) => {
      const column = first + place;
      const button = document.createElement("button");
      button.type = "button";
      button.append(...head.childNodes);
      head.append(button);
      button.addEventListener("click", () => {
        const up = head.getAttribute("aria-sort") !== "ascending";
        const rows = [...body.rows].map((row) => [valued(row.cells[column]), row]);
        rows.sort((a, b) => (missing(a[0]) || missing(b[0]) ? compared(a[0], b[0]) : compared(a[0], b[0]) * (up ? 1 : -1)));
        body.append(...rows.map((pair) => pair[1]));
        heads.forEach((other) => other.removeAttribute("aria-sort"));
        head.setAttribute("aria-sort", up ? "ascending" : "descending");
      });
    });
  }
})();
