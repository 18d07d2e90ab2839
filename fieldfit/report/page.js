"use strict";
// Adds sorting by column and hiding by verdict to the table of members; the page says everything without it.
const table = document.getElementById("members");
if (table) {
  const body = table.tBodies[0];
  const rows = Array.from(body.rows);
  Array.from(table.tHead.rows[0].cells).forEach((heading, column) => {
    const button = document.createElement("button");
    button.type = "button";
    button.textContent = heading.textContent;
    button.addEventListener("click", () => {
      const rising = heading.getAttribute("aria-sort") !== "ascending";
      table.querySelectorAll("th[aria-sort]").forEach((other) => other.removeAttribute("aria-sort"));
      heading.setAttribute("aria-sort", rising ? "ascending" : "descending");
      const key = (row) => row.cells[column].dataset.key || row.cells[column].textContent.trim();
      const compare = new Intl.Collator(undefined, { numeric: true }).compare;
      body.append(...rows.sort((a, b) => (rising ? 1 : -1) * compare(key(a), key(b))));
    });
    heading.replaceChildren(button);
  });
  const filter = document.getElementById("filter");
  filter.hidden = rows.length < 2;
  filter.addEventListener("change", () => {
    const wanted = new Set(Array.from(filter.querySelectorAll("input:checked"), (box) => box.value));
    rows.forEach((row) => { row.hidden = !wanted.has(row.dataset.verdict); });
  });
}
