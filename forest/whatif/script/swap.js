// @ts-check
"use strict";

/** Style sheets of the places in what is shown, by outcome. @type {Map<string, CSSStyleSheet>} */
const placeSheets = new Map();

/** HTML of the elements that swap has put on the page, by their ids. @type {Map<string, string>} */
const swapped = new Map();

/**
 * Shows a reply in place of what the page shows of an outcome: its opening sentence, its
 * sections and its methods. Sections that read the same stay as they are; so do elements
 * beside the sections, focus, scroll, sliders, filters, sorting and opened details.
 * Sections that come late are marked busy until they do. Nothing here asks where anything
 * stands once it is replaced: the browser keeps the scroll, and lays the page out once.
 * @param {string} outcomeId the prefix of the outcome's ids, as "o1"
 * @param {Reply} reply one with a document
 */
function swap(outcomeId, reply) {
  const outcome = document.getElementById(outcomeId);
  if (!outcome || !reply.sections) return;
  const focus = focusPath(document.activeElement);
  const changed = replaceSections(outcome, reply.sections, reply.late ?? []);
  placePositions(outcomeId, reply.css ?? "");
  const lead = document.getElementById(outcomeId + "-lead");
  if (lead && lead.innerHTML !== reply.lead) lead.innerHTML = reply.lead ?? "";
  rebindOutcome(reply.data, changed);
  hideDeadLinks(outcomeId);
  refocus(focus);
}

/** Sections to which the page has added something, so that they are completed in place. */
const completed = ["-trials", "-panel", "-data"];

/**
 * Shows what came late of an answer.
 * @param {string} outcomeId
 * @param {Reply} whole
 */
function swapRest(outcomeId, whole) {
  for (const { id, html } of whole.sections ?? []) {
    const old = document.getElementById(id);
    if (!old || swapped.get(id) === html || !completed.some((end) => id.endsWith(end))) continue;
    completeSection(old, elementOf(html));
    swapped.set(id, html);
  }
  swap(outcomeId, whole);
}

/**
 * Fills in the forms of charts that were not drawn at first, and numbers figures and
 * tables anew.
 * @param {Element} old @param {Element} fresh
 */
function completeSection(old, fresh) {
  const pairs = (/** @type {string} */ selector, /** @type {(a: Element, b: Element) => void} */ act) => {
    const there = fresh.querySelectorAll(selector);
    old.querySelectorAll(selector).forEach((e, i) => there[i] && act(e, there[i]));
  };
  pairs("caption, figcaption", (a, b) => { if (a.innerHTML !== b.innerHTML) a.innerHTML = b.innerHTML; });
  pairs("figure > .wide, figure > .narrow", (a, b) => { if (!a.querySelector("svg")) a.prepend(...b.childNodes); });
}

/** @param {string} outcomeId @param {string} css */
function placePositions(outcomeId, css) {
  let sheet = placeSheets.get(outcomeId);
  if (!sheet) {
    sheet = new CSSStyleSheet();
    placeSheets.set(outcomeId, sheet);
    document.adoptedStyleSheets = [...document.adoptedStyleSheets, sheet];
  }
  sheet.replaceSync(css);
}

/**
 * @param {HTMLElement} outcome
 * @param {{id: string, html: string}[]} sections
 * @param {string[]} late ids of sections that are kept, but busy
 * @returns {HTMLElement[]} the new elements
 */
function replaceSections(outcome, sections, late) {
  /** @type {HTMLElement[]} */
  const changed = [];
  const places = sections.map(({ id, html }) => {
    const old = document.getElementById(id);
    const same = old !== null && swapped.get(id) === html;
    return { id, html, old, same, kept: old && !same ? stateOf(old) : null }; // all read before the first is replaced, or each would be laid out anew
  });
  const wanted = new Set([...sections.map((section) => section.id), ...late]);
  for (const old of Array.from(outcome.children)) {
    if (old.localName !== "section" || !old.id) continue;
    if (late.includes(old.id)) old.setAttribute("aria-busy", "true");
    else old.removeAttribute("aria-busy");
    if (wanted.has(old.id)) continue;
    old.remove();
    swapped.delete(old.id);
  }
  /** @type {Element | null} the section before */
  let before = null;
  for (const { id, html, old, same, kept } of places) {
    if (same) {
      before = old;
      continue;
    }
    const fresh = elementOf(html);
    if (old && kept) {
      old.replaceWith(fresh);
      restore(fresh, kept);
    } else if (before) {
      before.after(fresh);
    } else {
      outcome.append(fresh);
    }
    swapped.set(id, html);
    changed.push(fresh);
    before = fresh;
  }
  return changed;
}

/** @param {string} html of one element @returns {HTMLElement} */
function elementOf(html) {
  const template = document.createElement("template");
  template.innerHTML = html;
  return /** @type {HTMLElement} */ (template.content.firstElementChild);
}

/**
 * What a reader has opened, scrolled, sorted and filtered within a section.
 * @typedef {{open: boolean[], scrolled: number[], filters: string[], sorted: {table: string, head: number, order: string}[]}} Kept
 * @param {Element} section
 * @returns {Kept}
 */
function stateOf(section) {
  const list = (/** @type {string} */ selector) => Array.from(section.querySelectorAll(selector));
  return {
    open: list("details").map((e) => /** @type {HTMLDetailsElement} */ (e).open),
    scrolled: list(".scroll").map((e) => e.scrollLeft),
    filters: list("[data-filter]").map((e) => /** @type {HTMLInputElement} */ (e).value),
    sorted: list("th[aria-sort]").map((e) => ({
      table: e.closest("table")?.id ?? "",
      head: /** @type {HTMLTableCellElement} */ (e).cellIndex,
      order: e.getAttribute("aria-sort") ?? "",
    })),
  };
}

/** @param {Element} section @param {Kept} kept */
function restore(section, kept) {
  const each = (/** @type {string} */ selector, /** @type {(e: any, i: number) => void} */ act) => section.querySelectorAll(selector).forEach(act);
  each("details", (e, i) => { e.open = kept.open[i] ?? e.open; });
  if (kept.scrolled.some((left) => left !== 0)) each(".scroll", (e, i) => { e.scrollLeft = kept.scrolled[i] ?? 0; });
  each("[data-filter]", (e, i) => { if (kept.filters[i]) e.value = kept.filters[i]; });
  for (const { table, head, order } of kept.sorted) {
    const cell = table ? section.querySelector(`#${table} thead tr`)?.children[head] : undefined;
    if (cell) cell.setAttribute("data-sorted", order); // rebindOutcome sorts by it
  }
}

/**
 * How to find an element again after its section was replaced.
 * @typedef {{id: string, path: number[]}} FocusPath
 * @param {Element | null} element
 * @returns {FocusPath | null}
 */
function focusPath(element) {
  /** @type {number[]} */
  const path = [];
  for (let e = element; e && e !== document.body; e = e.parentElement) {
    if (e.id) return { id: e.id, path };
    path.unshift(Array.prototype.indexOf.call(e.parentElement?.children ?? [], e));
  }
  return null;
}

/** Gives focus back to an element, or to the nearest around it that is still there. @param {FocusPath | null} was */
function refocus(was) {
  if (!was || (document.activeElement && document.activeElement !== document.body)) return;
  const root = document.getElementById(was.id);
  if (!root) return;
  let found = root;
  for (const i of was.path) {
    const child = found.children[i];
    if (!child) break;
    found = /** @type {HTMLElement} */ (child);
  }
  found.focus({ preventScroll: true });
  if (document.activeElement === found) return;
  root.tabIndex = -1;
  root.focus({ preventScroll: true });
}

/** Hides the lines of the contents whose sections are not shown. @param {string} outcomeId */
function hideDeadLinks(outcomeId) {
  document.querySelectorAll(`nav.toc a[href^="#${outcomeId}-"]`).forEach((link) => {
    const line = link.closest("li");
    if (line) line.hidden = !document.getElementById((link.getAttribute("href") ?? "").slice(1));
  });
}
