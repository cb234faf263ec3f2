/**
 * The page's data, as the program wrote it. The script picks texts and places from it
 * and computes no statistic.
 * @type {{outcomes: Outcome[]}}
 * @typedef {{id: string, title: string, span: number, from: number, priors: {prior: string, posterior: string, shift: number}[], prior: number,
 *   rows: Object<string, string[]>, studies: {mark?: string, row: number, name: string}[], left: {row: number, name: string}[],
 *   baselines?: {texts: Object<string, string>, bars: Object<string, number>}[], baseline: number}} Outcome
 */
const data = JSON.parse(document.getElementById('data').textContent);

/**
 * Elements that match a selector within a root.
 * @param {string} selector
 * @param {ParentNode} [root]
 * @returns {Element[]}
 */
const all = (selector, root = document) => Array.from(root.querySelectorAll(selector));

/** Fills the slots of a name within a root with a text. */
const put = (root, slot, text) => all(`[data-t="${slot}"]`, root).forEach((e) => { e.textContent = text; });

/** Shows what works only with script. */
const showLive = (root) => all('.live', root).forEach((e) => { e.hidden = false; });

/** The data of an outcome as it is shown. @returns {Outcome} */
const pageOutcome = (id) => data.outcomes.find((outcome) => outcome.id === id);
