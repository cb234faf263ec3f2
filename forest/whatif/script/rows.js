// @ts-check
"use strict";

/**
 * Boxes in the table of studies, and buttons over the rows of the forest chart, to leave
 * studies out and to take them back. Both are made anew whenever the sections are.
 */
class Rows {
  /**
   * @param {string} id of the outcome
   * @param {Known} known
   * @param {(row: number) => void} toggle
   */
  constructor(id, known, toggle) {
    this.id = id;
    this.known = known;
    this.toggle = toggle;
    /** @type {{mark?: string, row: number, name: string}[]} the pooled rows, in the order of the chart */
    this.shown = [];
    /** @type {Map<number, Element>} rows of the table as planned */
    this.planned = new Map();
    this.on = true;
  }

  /**
   * @param {{mark?: string, row: number, name: string}[]} studies that are shown
   * @param {number[]} out rows that the variant leaves out
   */
  attach(studies, out) {
    this.shown = studies;
    this.attachTable(new Set(out));
    this.attachCharts();
  }

  /** Takes all away again: the engine is broken. */
  detach() {
    this.on = false;
    for (const e of document.querySelectorAll(`#${this.id} .wi-rows, #${this.id}-studies .wi-box`)) e.remove();
  }

  /** @param {Set<number>} out */
  attachTable(out) {
    const table = /** @type {HTMLTableElement | null} */ (byId(this.id + "-studies"));
    if (table === null || !this.on) return;
    for (const old of table.querySelectorAll("tr.wi-out")) old.remove();
    const rows = new Map(this.shown.map((s) => [s.mark, s]));
    const body = table.tBodies[0];
    for (const tr of Array.from(body.rows)) {
      const study = rows.get(tr.dataset.study);
      if (study === undefined) continue;
      if (this.planned.size < this.known.studies.length && out.size === 0) this.planned.set(study.row, /** @type {Element} */ (tr.cloneNode(true)));
      this.box(tr, study.row, study.name, true);
    }
    for (const row of out) this.leftOut(table, row);
  }

  /**
   * A row that is left out stands in the table with its name, and without numbers.
   * @param {HTMLTableElement} table @param {number} row
   */
  leftOut(table, row) {
    const name = this.known.studies.find((s) => s.row === row)?.name;
    const model = this.planned.get(row);
    if (name === undefined || !(model instanceof HTMLTableRowElement)) return;
    const tr = /** @type {HTMLTableRowElement} */ (model.cloneNode(true));
    tr.removeAttribute("data-study");
    tr.className = "wi-out";
    const heads = table.tHead?.rows[0].cells.length ?? tr.cells.length;
    while (tr.cells.length > heads) tr.deleteCell(-1);
    while (tr.cells.length < heads) tr.insertCell(-1);
    Array.from(tr.cells).forEach((cell, i) => {
      if (i > 1 && i < heads - 1) {
        cell.textContent = i === 2 ? "left out" : "–";
        cell.removeAttribute("data-s");
      }
    });
    this.box(tr, row, name, false);
    const after = this.known.studies.findIndex((s) => s.row === row);
    const later = new Set(this.known.studies.slice(after + 1).map((s) => String(s.row)));
    const next = Array.from(table.tBodies[0].rows).find((r) => later.has(r.querySelector(".wi-box input")?.getAttribute("data-table-row") ?? ""));
    table.tBodies[0].insertBefore(tr, next ?? null);
  }

  /** @param {HTMLTableRowElement} tr @param {number} row @param {string} name @param {boolean} checked */
  box(tr, row, name, checked) {
    if (tr.querySelector(".wi-box") !== null) return;
    const input = /** @type {HTMLInputElement} */ (make("input", { type: "checkbox", "data-table-row": String(row), "data-again": "table " + row, "aria-label": `${name}: pooled`, autocomplete: "off" }));
    input.checked = checked;
    input.addEventListener("change", () => this.toggle(row));
    tr.cells[0].prepend(make("span", { class: "wi-box" }, input));
  }

  attachCharts() {
    if (!this.on) return;
    for (const host of document.querySelectorAll(`#${this.id}-forest > div`)) {
      host.querySelector(":scope > .wi-rows")?.remove();
      if (host.getClientRects().length > 0) this.attachChart(/** @type {HTMLElement} */ (host));
    }
  }

  /**
   * Lays a button over each row of a chart. The keyboard stops once per chart; arrows go
   * from row to row.
   * @param {HTMLElement} host
   */
  attachChart(host) {
    const bar = make("div", { class: "wi-rows", role: "toolbar", "aria-orientation": "vertical", "aria-label": `Leave ${this.known.nouns} out` });
    host.append(bar);
    const box = bar.getBoundingClientRect();
    const groups = new Map(Array.from(host.querySelectorAll('g[id*="-row-"]'), (g) => [g.id.split("-row-")[1], g]));
    const places = this.shown.map((_, i) => groups.get(String(i + 1))?.getBoundingClientRect()); // all before the first button, or each would be laid out anew
    const planned = new Set(this.known.studies.map((s) => s.row));
    /** @type {HTMLElement[]} */
    const buttons = [];
    this.shown.forEach((study, i) => {
      const place = places[i];
      if (place === undefined || box.height === 0) return;
      const group = groups.get(String(i + 1));
      const what = planned.has(study.row) ? `Leave out ${study.name}` : `Take away ${study.name}`;
      const button = makeButton("", () => this.toggle(study.row), { "aria-label": what, title: what, "data-again": "chart " + study.row, tabindex: buttons.length === 0 ? "0" : "-1" });
      button.style.top = `${((place.top - box.top) / box.height) * 100}%`;
      button.style.height = `${(place.height / box.height) * 100}%`;
      for (const event of ["pointerenter", "pointerleave"]) button.addEventListener(event, () => group?.dispatchEvent(new Event(event)));
      buttons.push(button);
    });
    bar.append(...buttons);
    bar.addEventListener("keydown", (event) => moveAlong(bar, event));
    if (bar.children.length === 0) bar.remove();
  }
}

/**
 * Arrows, Home and End move within a toolbar.
 * @param {HTMLElement} bar
 * @param {KeyboardEvent} event
 */
function moveAlong(bar, event) {
  const buttons = /** @type {HTMLElement[]} */ (Array.from(bar.children));
  const at = buttons.indexOf(/** @type {HTMLElement} */ (document.activeElement));
  const to = { ArrowDown: at + 1, ArrowUp: at - 1, Home: 0, End: buttons.length - 1 }[event.key];
  if (to === undefined || buttons[to] === undefined) return;
  event.preventDefault();
  for (const button of buttons) button.tabIndex = -1;
  buttons[to].tabIndex = 0;
  buttons[to].focus();
}
