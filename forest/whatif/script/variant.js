// @ts-check
"use strict";

/**
 * A changed analysis of one outcome, as the engine takes it.
 * @typedef {{study?: string, year?: number, numbers: Record<string, number>}} Addition
 * @typedef {{outcome: string, changes: Record<string, string>, left_out: number[], added: Addition | null}} Variant
 */

/** @param {string} outcome @returns {Variant} the analysis as planned */
function planned(outcome) {
  return { outcome, changes: {}, left_out: [], added: null };
}

/** @param {Variant} v @returns {boolean} whether it is the analysis as planned */
function isPlanned(v) {
  return Object.keys(v.changes).length === 0 && v.left_out.length === 0 && v.added === null;
}

/**
 * The same variant always reads the same: settings and rows in order, blanks dropped.
 * @param {Variant} v
 * @returns {Variant}
 */
function tidied(v) {
  /** @type {Record<string, string>} */
  const changes = {};
  for (const name of Object.keys(v.changes).sort()) {
    const value = v.changes[name].trim();
    if (value !== "") changes[name] = value;
  }
  return { outcome: v.outcome, changes, left_out: [...new Set(v.left_out)].sort((a, b) => a - b), added: v.added };
}

/** @param {Variant} a @param {Variant} b */
function sameVariant(a, b) {
  return JSON.stringify(tidied(a)) === JSON.stringify(tidied(b));
}

/**
 * Variants as the part of a link behind #, readable and short. The analysis as planned
 * is blank.
 * @param {Variant[]} variants
 * @returns {string}
 */
function toFragment(variants) {
  return variants
    .map(tidied)
    .filter((v) => !isPlanned(v))
    .map((v) => {
      const pairs = new URLSearchParams();
      pairs.set("outcome", v.outcome);
      if (v.left_out.length > 0) pairs.set("without-rows", v.left_out.join("."));
      for (const [name, value] of Object.entries(v.changes)) pairs.set(name, value);
      if (v.added !== null) pairs.set("added-study", JSON.stringify(v.added));
      return "what-if?" + pairs;
    })
    .join("/");
}

/**
 * Reads a link's fragment; what is not one of ours is left out, so that a damaged link
 * shows the analysis as planned. The engine checks the values.
 * @param {string} fragment with or without #
 * @returns {Variant[]}
 */
function fromFragment(fragment) {
  /** @type {Variant[]} */
  const variants = [];
  for (const part of fragment.replace(/^#/, "").split("/")) {
    if (!part.startsWith("what-if?")) continue;
    const v = planned("");
    for (const [name, value] of new URLSearchParams(part.slice("what-if?".length))) {
      if (name === "outcome") v.outcome = value;
      else if (name === "without-rows") v.left_out = value.split(".").map(Number).filter((n) => Number.isInteger(n) && n > 0);
      else if (name === "added-study") v.added = additionOf(value);
      else v.changes[name] = value;
    }
    variants.push(tidied(v));
  }
  return variants;
}

/** @param {string} text @returns {Addition | null} */
function additionOf(text) {
  try {
    const a = JSON.parse(text);
    const numbers = Object.entries(a.numbers ?? {}).filter(([, value]) => Number.isFinite(value));
    if (numbers.length === 0) return null;
    /** @type {Addition} */
    const added = { numbers: Object.fromEntries(numbers) };
    if (typeof a.study === "string") added.study = a.study.slice(0, 200);
    if (Number.isInteger(a.year)) added.year = a.year;
    return added;
  } catch {
    return null;
  }
}

/**
 * What was looked at, with undo and redo, and the log that travels with an exported
 * result: choosing among many looks is itself a bias.
 */
class Looks {
  /** @param {Variant} first */
  constructor(first) {
    /** @type {Variant[]} */
    this.past = [];
    this.now = tidied(first);
    /** @type {Variant[]} */
    this.future = [];
    /** @type {Variant[]} every variant other than the plan, once, in the order of its first look */
    this.log = [];
    this.note();
  }

  note() {
    if (!isPlanned(this.now) && !this.log.some((v) => sameVariant(v, this.now))) this.log.push(this.now);
  }

  /** @param {Variant} v @returns {boolean} whether it differs from what is shown */
  change(v) {
    const next = tidied(v);
    if (sameVariant(next, this.now)) return false;
    this.past.push(this.now);
    this.now = next;
    this.future = [];
    this.note();
    return true;
  }

  /** @returns {boolean} whether there was something to undo */
  undo() {
    const before = this.past.pop();
    if (before === undefined) return false;
    this.future.push(this.now);
    this.now = before;
    return true;
  }

  /** @returns {boolean} whether there was something to redo */
  redo() {
    const after = this.future.pop();
    if (after === undefined) return false;
    this.past.push(this.now);
    this.now = after;
    return true;
  }
}
