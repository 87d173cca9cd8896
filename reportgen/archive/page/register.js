"use strict";
// The table stands without this script; it adds a filter, two choices and sorting by column.
(function () {
  const table = document.querySelector("table");
  const body = table.tBodies[0];
  const rows = Array.from(body.rows);
  const texts = rows.map((row) => row.textContent.toLowerCase());
  const tools = document.querySelector(".tools");
  const count = document.querySelector("#count");
  const words = document.querySelector("#words");
  const verdict = document.querySelector("#verdict");
  const latest = document.querySelector("#latest");
  tools.hidden = false;

  function filter() {
    const asked = words.value.toLowerCase().split(/\s+/).filter(Boolean);
    let shown = 0;
    rows.forEach((row, n) => {
      const keep =
        asked.every((word) => texts[n].includes(word)) &&
        (!verdict.value || row.dataset.verdict === verdict.value) &&
        (!latest.checked || row.dataset.latest === "yes");
      row.hidden = !keep;
      shown += keep;
    });
    count.textContent = shown + " of " + rows.length + " packages shown";
  }

  const compare = new Intl.Collator("en", { numeric: true }).compare;
  function key(row, column) {
    const cell = row.cells[column];
    return cell.dataset.key || cell.textContent;
  }
  table.tHead.querySelectorAll("th").forEach((head, column) => {
    const button = document.createElement("button");
    button.type = "button";
    button.textContent = head.textContent;
    head.replaceChildren(button);
    button.addEventListener("click", () => {
      const up = head.getAttribute("aria-sort") !== "ascending";
      table.tHead.querySelectorAll("th").forEach((other) => other.removeAttribute("aria-sort"));
      head.setAttribute("aria-sort", up ? "ascending" : "descending");
      const keyed = rows.map((row) => [key(row, column), row]);
      keyed.sort((a, b) => (up ? 1 : -1) * compare(a[0], b[0]));
      body.append(...keyed.map((pair) => pair[1]));
    });
  });
  [words, verdict, latest].forEach((tool) => tool.addEventListener("input", filter));
  filter();
})();
