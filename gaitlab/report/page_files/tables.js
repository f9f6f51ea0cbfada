// Tables: bars behind figures, words to the left, sorting by a press on a heading, filtering by wiring.
function dressTable(table) {
  const rows = [...table.tBodies[0].rows];
  [...table.tHead.rows[0].cells].forEach((head, column) => {
    const keys = rows.map(row => row.cells[column].dataset.key);
    const numeric = keys.every(key => key === "" || Number.isFinite(Number(key)));
    if (!numeric) [head, ...rows.map(row => row.cells[column])].forEach(cell => cell.classList.add("words"));
    const button = head.querySelector("button");
    if (button) button.addEventListener("click", () => sortBy(table, column, numeric));
  });
  for (const cell of table.querySelectorAll("td[data-bar]")) addBar(cell, Number(cell.dataset.bar), hasBack(table));
}

function hasBack(table) {
  return [...table.querySelectorAll("td[data-bar]")].some(cell => Number(cell.dataset.bar) < 0);
}

function addBar(cell, share, split) {
  const bar = document.createElement("span"), zero = split ? 50 : 0, reach = split ? 50 : 100;
  bar.className = share < 0 ? "bar-fill back" : "bar-fill";
  bar.style.left = `${share < 0 ? zero + share * reach : zero}%`;
  bar.style.width = `${Math.abs(share) * reach}%`;
  cell.classList.add("with-bar");
  cell.append(bar);
}

function sortBy(table, column, numeric) {
  const heads = [...table.tHead.rows[0].cells], body = table.tBodies[0];
  const down = heads[column].getAttribute("aria-sort") === "ascending";
  heads.forEach(head => head.removeAttribute("aria-sort"));
  heads[column].setAttribute("aria-sort", down ? "descending" : "ascending");
  const key = row => row.cells[column].dataset.key;
  const compare = numeric
    ? (a, b) => Number(a) - Number(b)
    : (a, b) => a.localeCompare(b, "en", { numeric: true });
  const rows = [...body.rows].sort((a, b) => {
    if (key(a) === "" || key(b) === "") return (key(a) === "") - (key(b) === "");
    return (down ? -1 : 1) * compare(key(a), key(b));
  });
  body.append(...rows);
}

function filterRanking(table, words, status) {
  const wanted = words.trim().toLowerCase().split(/[\s,]+/).filter(Boolean);
  let shown = 0;
  for (const row of table.tBodies[0].rows) {
    const pairs = row.cells[1].textContent.toLowerCase().split(" ");
    row.hidden = !wanted.every(word => pairs.some(pair => pair.startsWith(word)));
    shown += !row.hidden;
  }
  status.textContent = `${shown} shown`;
}
