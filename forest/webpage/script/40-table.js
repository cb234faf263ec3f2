/** Makes the heads of a table sort its rows. */
function makeSortable(table) {
  all('thead th', table).forEach((head) => {
    const button = document.createElement('button');
    button.type = 'button';
    button.append(...head.childNodes);
    head.append(button);
    button.addEventListener('click', () => sortBy(table, head));
  });
}

/** Sorts the rows of a table by a column, up at first, then down. */
function sortBy(table, head, up = head.getAttribute('aria-sort') !== 'ascending') {
  all('thead th', table).forEach((h) => h.removeAttribute('aria-sort'));
  head.setAttribute('aria-sort', up ? 'ascending' : 'descending');
  const body = table.tBodies[0];
  const key = (row) => {
    const cell = row.cells[head.cellIndex];
    return cell.dataset.s ? +cell.dataset.s : cell.textContent.toLowerCase();
  };
  const order = (a, b) => {
    if (typeof a === typeof b) return a < b ? -1 : a > b ? 1 : 0;
    return typeof a === 'number' ? -1 : 1;
  };
  Array.from(body.rows).sort((a, b) => order(key(a), key(b)) * (up ? 1 : -1)).forEach((row) => body.append(row));
}

/** Makes the controls above a table narrow its rows, and dims the others in the charts. */
function makeFilter(controls) {
  const table = controls.nextElementSibling.querySelector('table');
  const inputs = all('[data-filter]', controls);
  const apply = () => {
    const rows = Array.from(table.tBodies[0].rows);
    rows.forEach((row) => {
      row.hidden = !inputs.every((input) => {
        if (input.dataset.filter === 'column') return !input.value || row.cells[input.dataset.column].textContent === input.value;
        return row.textContent.toLowerCase().includes(input.value.trim().toLowerCase());
      });
      markStudy(row.dataset.study, 'dim', row.hidden);
    });
    controls.querySelector('output').textContent = `${rows.filter((row) => !row.hidden).length} of ${rows.length} rows`;
  };
  inputs.forEach((input) => input.addEventListener('input', apply));
  if (inputs.some((input) => input.value)) apply();
}

/** Binds the tables within a root; they come as they were sorted and filtered. */
function bindTables(root) {
  all('table.sort', root).forEach((table) => {
    makeSortable(table);
    all('th[data-sorted]', table).forEach((head) => sortBy(table, head, head.dataset.sorted === 'ascending'));
  });
  all('.filter', root).forEach(makeFilter);
}
