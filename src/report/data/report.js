"use strict";
// The slider between two maps: how far from the left the first one reaches.
for (const slider of document.querySelectorAll(".slider")) {
  const input = slider.querySelector("input");
  const output = slider.querySelector("output");
  const map = document.getElementById(input.dataset.map);
  const show = () => {
    map.style.setProperty("--split", input.value + "%");
    output.textContent = input.value + " %";
    input.setAttribute("aria-valuetext", input.value + " percent of the map as it is, the rest with the change");
  };
  input.addEventListener("input", show);
  show();
}

// Tables that sort by a column: numbers as numbers, what has none last.
const keyOf = (row, column) => {
  const cell = row.cells[column];
  if (!("value" in cell.dataset)) return cell.textContent.trim();
  return cell.dataset.value === "" ? NaN : Number(cell.dataset.value);
};
const compare = (a, b) => {
  if (typeof a === "string") return a.localeCompare(b, "en", { numeric: true });
  if (Number.isNaN(a) || Number.isNaN(b)) return 0;
  return a - b;
};
const sortBy = (heading) => {
  const table = heading.closest("table");
  const headings = [...heading.parentElement.cells];
  const column = headings.indexOf(heading);
  const direction = heading.getAttribute("aria-sort") === "ascending" ? "descending" : "ascending";
  for (const other of headings) if (other.hasAttribute("aria-sort")) other.setAttribute("aria-sort", "none");
  heading.setAttribute("aria-sort", direction);
  const body = table.tBodies[0];
  const rows = [...body.rows].map((row) => ({ row, key: keyOf(row, column) }));
  const last = (entry) => (Number.isNaN(entry.key) ? 1 : 0);
  rows.sort((a, b) => last(a) - last(b) || (direction === "ascending" ? 1 : -1) * compare(a.key, b.key));
  body.append(...rows.map((entry) => entry.row));
  const said = document.getElementById(table.dataset.said);
  if (said) said.textContent = "Sorted by " + heading.textContent.trim() + ", " + direction + ".";
};
for (const heading of document.querySelectorAll("th[aria-sort]"))
  heading.querySelector("button").addEventListener("click", () => sortBy(heading));

// A zone's row and its outline on the map, chosen together.
const choose = (zone, fromMap) => {
  for (const old of document.querySelectorAll(".zone.chosen, tr.chosen")) old.classList.remove("chosen");
  const outline = document.getElementById("zone-" + zone);
  const rows = document.querySelectorAll('tr[data-zone="' + zone + '"]');
  if (outline) {
    outline.classList.add("chosen");
    outline.parentNode.append(outline);
    if (!fromMap) outline.closest(".map").scrollIntoView({ block: "nearest" });
  }
  for (const row of rows) row.classList.add("chosen");
  if (fromMap && rows.length > 0) rows[0].scrollIntoView({ block: "nearest" });
  for (const button of document.querySelectorAll("tr[data-zone] button"))
    button.setAttribute("aria-pressed", String(button.closest("tr").dataset.zone === zone));
};
for (const button of document.querySelectorAll("tr[data-zone] button"))
  button.addEventListener("click", () => choose(button.closest("tr").dataset.zone, false));
for (const outline of document.querySelectorAll(".zone"))
  outline.addEventListener("click", () => choose(outline.id.slice("zone-".length), true));
