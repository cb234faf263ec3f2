"use strict";
const test = require("node:test");
const assert = require("node:assert");
const { load } = require("./load.js");

const { differencesOf, differenceOf, comparedOf, inShort } = load("wording.js", ["differencesOf", "differenceOf", "comparedOf", "inShort"]);

const plain = (value) => JSON.parse(JSON.stringify(value));
const known = {
  noun: "trial", nouns: "trials", planned: { effects: "random", prior: "" }, labels: { effects: "effects", prior: "prior" },
  studies: ["Ålund <b>", "Berg", "Çelik", "Dvořák", "Eng", "Fox"].map((name, i) => ({ row: i + 4, name, cells: {} })),
};
const variant = (changes, left_out = [], added = null) => ({ outcome: "x", changes, left_out, added });

test("what differs from the plan is said in words, each difference once", () => {
  assert.deepStrictEqual(plain(differencesOf(variant({}), known)), []);
  assert.deepStrictEqual(plain(differencesOf(variant({ effects: "common", prior: "0.1", where: "year > 1990" }), known)), ["effects common (planned: random)", "prior 0.1", "where year > 1990"]);
  assert.deepStrictEqual(plain(differencesOf(variant({}, [4]), known)), ["1 trial left out: Ålund <b>"]);
  assert.deepStrictEqual(plain(differencesOf(variant({}, [4, 5, 6, 7, 8, 9]), known)), ["6 trials left out: Ålund <b>, Berg, Çelik, Dvořák and 2 more"]);
  assert.deepStrictEqual(plain(differencesOf(variant({}, [99]), known)), ["1 trial left out: row 99"]);
  assert.deepStrictEqual(plain(differencesOf(variant({}, [], { numbers: { estimate: -0.5, se: 0.2 } }), known)), ["a hypothetical trial added: estimate −0.5, se 0.2"]);
});

test("a difference agrees with the two numbers that stand beside it", () => {
  for (const [before, after, want] of [
    ["0.71", "0.72", "+0.01"], ["0.72", "0.71", "−0.01"], ["2.55", "7.35", "+4.80"], ["−0.20", "0.15", "+0.35"], ["9", "8", "−1"],
    ["0.99", "1.00", "+0.01"], ["0.073", "0.10", "+0.027"], ["1,240", "980", "−260"], ["0.5", "0.5", "none"], ["0.29", "0.57", "+0.28"],
    ["> 10,000", "3", ""], ["–", "3", ""], [undefined, "3", ""],
  ]) assert.strictEqual(differenceOf(before, after), want, `${before} to ${after}`);
});

const facts = (more) => ({ measure: "risk ratio", pooled: "9 trials", studies: "9", estimate: "0.71", low: "0.58", high: "0.86", interval: "0.58 to 0.86", level: "95%", steps: "2.55", odds: "29 : 1", ...more });

test("plan and change stand side by side, with the difference of each", () => {
  const lines = plain(comparedOf(facts(), facts({ estimate: "0.79", low: "0.61", high: "1.02", interval: "0.61 to 1.02", steps: "2.13", odds: "17 : 1", pooled: "8 trials", studies: "8" })));
  assert.deepStrictEqual(lines.map((l) => [l.what, l.planned, l.now, l.change]), [
    ["Risk ratio", "0.71", "0.79", "+0.08"], ["95% interval", "0.58 to 0.86", "0.61 to 1.02", "lower +0.03, upper +0.16"],
    ["Evidence in steps", "2.55", "2.13", "−0.42"], ["Evidence, effect : none", "29 : 1", "17 : 1", ""], ["Pooled", "9 trials", "8 trials", "−1"],
  ]);
  const other = plain(comparedOf(facts(), facts({ level: "90%", low: "0.60", high: "0.84", interval: "0.60 to 0.84" })));
  assert.deepStrictEqual(other[1], { what: "Interval", planned: "0.58 to 0.86 (95%)", now: "0.60 to 0.84 (90%)", change: "lower +0.02, upper −0.02" });
  assert.strictEqual(plain(comparedOf(facts(), facts()))[1].change, "none");
});

test("a side without a result says so, and nothing weighed has no steps", () => {
  assert.deepStrictEqual(plain(comparedOf(facts(), null)).map((l) => l.now), Array(5).fill("no result"));
  assert.deepStrictEqual(plain(comparedOf(null, null)), []);
  const { steps, odds, ...unweighed } = facts();
  assert.strictEqual(plain(comparedOf(unweighed, unweighed)).length, 3);
});

test("one line says what is shown and how far it is from the plan", () => {
  assert.strictEqual(inShort(facts(), facts({ steps: "2.13" })), "Risk ratio 0.71 (0.58 to 0.86), evidence 2.13 steps (−0.42).");
  assert.strictEqual(inShort(null, facts()), "Risk ratio 0.71 (0.58 to 0.86), evidence 2.55 steps.");
  assert.strictEqual(inShort(facts(), null), "No result.");
});
