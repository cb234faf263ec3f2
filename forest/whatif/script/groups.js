// @ts-check
"use strict";

/**
 * The rows of the studies whose cell in a column has a value.
 * @param {Listed[]} studies
 * @param {string} column
 * @param {string} value blank for an empty cell
 * @returns {number[]}
 */
function rowsWith(studies, column, value) {
  return studies.filter((s) => (s.cells[column] ?? "") === value).map((s) => s.row);
}

/**
 * The rows of the studies whose number in a column lies outside a range; an end that is
 * no number is open, and a study without a number is in.
 * @param {Listed[]} studies
 * @param {string} column
 * @param {string} from
 * @param {string} to
 * @returns {number[]}
 */
function rowsOutside(studies, column, from, to) {
  const low = endOf(from, -Infinity);
  const high = endOf(to, Infinity);
  return studies
    .filter((s) => {
      const value = endOf(s.cells[column] ?? "", NaN);
      return value < low || value > high;
    })
    .map((s) => s.row);
}

/** @param {string} text @param {number} otherwise */
function endOf(text, otherwise) {
  const clean = text.trim().replace(/\u2212/g, "-");
  return clean !== "" && Number.isFinite(Number(clean)) ? Number(clean) : otherwise;
}

/**
 * How much of a group is in: "all", "none" or "some".
 * @param {number[]} rows
 * @param {Set<number>} out
 */
function shareIn(rows, out) {
  const left = rows.filter((row) => out.has(row)).length;
  return left === 0 ? "all" : left === rows.length ? "none" : "some";
}
