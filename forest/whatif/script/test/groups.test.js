"use strict";
const test = require("node:test");
const assert = require("node:assert");
const { load } = require("./load.js");

const { rowsWith, rowsOutside, shareIn } = load("groups.js", ["rowsWith", "rowsOutside", "shareIn"]);

const studies = [
  { row: 5, name: "a", cells: { year: "1990", bias: "high" } }, { row: 7, name: "b", cells: { year: "2001", bias: "low" } },
  { row: 8, name: "c", cells: { bias: "high" } }, { row: 9, name: "d", cells: { year: "−3" } },
];

test("a group is the studies with a text in a column, a blank one included", () => {
  assert.deepStrictEqual([...rowsWith(studies, "bias", "high")], [5, 8]);
  assert.deepStrictEqual([...rowsWith(studies, "bias", "")], [9]);
  assert.deepStrictEqual([...rowsWith(studies, "shoe", "42")], []);
});

test("a range leaves out what lies outside it, and never a study without a number", () => {
  assert.deepStrictEqual([...rowsOutside(studies, "year", "1990", "2000")], [7, 9]);
  assert.deepStrictEqual([...rowsOutside(studies, "year", "", "1995")], [7]);
  assert.deepStrictEqual([...rowsOutside(studies, "year", " −5 ", "0")], [5, 7]);
  assert.deepStrictEqual([...rowsOutside(studies, "year", "then", "now")], [], "ends that are no numbers are open");
});

test("a group is in, out, or partly", () => {
  assert.strictEqual(shareIn([5, 8], new Set([9])), "all");
  assert.strictEqual(shareIn([5, 8], new Set([8])), "some");
  assert.strictEqual(shareIn([5, 8], new Set([5, 8, 9])), "none");
});
