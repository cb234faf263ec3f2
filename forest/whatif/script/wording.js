// @ts-check
"use strict";

/**
 * A study as the sheet has it, by its row.
 * @typedef {{row: number, name: string, cells: Record<string, string>}} Listed
 * What is known of an outcome before any change: how its studies are called, which there
 * are, the planned value of each setting by its name, and the settings' labels.
 * @typedef {{noun: string, nouns: string, studies: Listed[], planned: Record<string, string>, labels: Record<string, string>}} Known
 * The texts of an answer, as the program wrote them; steps, odds and strength are absent
 * where nothing is weighed.
 * @typedef {{measure: string, pooled: string, studies: string, estimate: string, low: string, high: string, interval: string,
 *   level: string, steps?: string, odds?: string, strength?: string}} Facts
 * @typedef {{what: string, planned: string, now: string, change: string}} Compared
 */

/** How many names a sentence holds; the rest are counted. */
const mostNames = 4;

/**
 * What a variant changes, each difference in words.
 * @param {Variant} v
 * @param {Known} known
 * @returns {string[]}
 */
function differencesOf(v, known) {
  const all = [];
  for (const [name, value] of Object.entries(v.changes)) {
    const label = known.labels[name] ?? name;
    const before = known.planned[name];
    all.push(before ? `${label} ${value} (planned: ${before})` : `${label} ${value}`);
  }
  const names = v.left_out.map((row) => known.studies.find((s) => s.row === row)?.name ?? `row ${row}`);
  if (names.length > 0) all.push(`${names.length} ${names.length === 1 ? known.noun : known.nouns} left out: ${listed(names)}`);
  if (v.added !== null) {
    const numbers = Object.entries(v.added.numbers).map(([name, value]) => `${name} ${String(value).replace("-", "−")}`);
    all.push(`a hypothetical ${known.noun} added: ${numbers.join(", ")}`);
  }
  return all;
}

/** @param {string[]} names @returns {string} */
function listed(names) {
  if (names.length <= mostNames + 1) return names.join(", ");
  return `${names.slice(0, mostNames).join(", ")} and ${names.length - mostNames} more`;
}

/**
 * A number as it is written on the page, with its decimals; null for a text that is none.
 * @param {string} text
 * @returns {{value: number, decimals: number} | null}
 */
function written(text) {
  const plain = text.replace(/\u2212/g, "-").replace(/,/g, "");
  if (!/^-?\d+(\.\d+)?$/.test(plain)) return null;
  return { value: Number(plain), decimals: (plain.split(".")[1] ?? "").length };
}

/**
 * The difference of two written numbers, in their own decimals, so that it agrees with
 * what the reader sees: "+0.07", "−1.60", "none"; blank where one is no number.
 * @param {string | undefined} before
 * @param {string | undefined} after
 */
function differenceOf(before, after) {
  const a = written(before ?? "");
  const b = written(after ?? "");
  if (a === null || b === null) return "";
  const decimals = Math.max(a.decimals, b.decimals);
  const unit = 10 ** decimals;
  const units = Math.round(b.value * unit) - Math.round(a.value * unit);
  if (units === 0) return "none";
  return (units > 0 ? "+" : "−") + (Math.abs(units) / unit).toFixed(decimals);
}

/**
 * The answer as planned and as changed, line by line; a side without a result is null.
 * @param {Facts | null} planned
 * @param {Facts | null} now
 * @returns {Compared[]}
 */
function comparedOf(planned, now) {
  const any = now ?? planned;
  if (any === null) return [];
  const text = (/** @type {Facts | null} */ f, /** @type {(f: Facts) => string | undefined} */ of) => (f === null ? "no result" : of(f) ?? "–");
  const line = (/** @type {string} */ what, /** @type {(f: Facts) => string | undefined} */ of, /** @type {string} */ change) =>
    ({ what, planned: text(planned, of), now: text(now, of), change });
  const limits = ["lower", "upper"].map((name, i) => {
    const of = (/** @type {Facts | null} */ f) => (i === 0 ? f?.low : f?.high);
    const difference = differenceOf(of(planned), of(now));
    return difference && `${name} ${difference}`;
  });
  const levels = new Set([planned?.level, now?.level].filter((x) => x !== undefined));
  const lines = [
    line(capitalised(any.measure), (f) => f.estimate, differenceOf(planned?.estimate, now?.estimate)),
    line(levels.size === 1 ? `${any.level} interval` : "Interval", (f) => (levels.size === 1 ? f.interval : `${f.interval} (${f.level})`), limits.every((x) => x.endsWith(" none")) ? "none" : limits.filter(Boolean).join(", ")),
  ];
  if (planned?.steps !== undefined || now?.steps !== undefined) {
    lines.push(line("Evidence in steps", (f) => f.steps, differenceOf(planned?.steps, now?.steps)));
    lines.push(line("Evidence, effect : none", (f) => f.odds, ""));
  }
  lines.push(line("Pooled", (f) => f.pooled, differenceOf(planned?.studies, now?.studies)));
  return lines;
}

/** @param {string} text */
function capitalised(text) {
  return text.slice(0, 1).toUpperCase() + text.slice(1);
}

/**
 * One line for the strip and for those who listen: what is shown, and how far it is from
 * the plan.
 * @param {Facts | null} planned
 * @param {Facts | null} now
 */
function inShort(planned, now) {
  if (now === null) return "No result.";
  let text = `${capitalised(now.measure)} ${now.estimate} (${now.interval})`;
  if (now.steps !== undefined) text += `, evidence ${now.steps} steps`;
  const change = differenceOf(planned?.steps, now.steps);
  if (change && change !== "none") text += ` (${change})`;
  return text + ".";
}
