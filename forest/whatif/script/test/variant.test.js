"use strict";
const test = require("node:test");
const assert = require("node:assert");
const { load } = require("./load.js");

const { planned, isPlanned, toFragment, fromFragment, Looks, sameVariant } = load("variant.js", ["planned", "isPlanned", "toFragment", "fromFragment", "Looks", "sameVariant"]);

/** Plain objects of this realm, so that they can be compared. */
const plain = (value) => JSON.parse(JSON.stringify(value));

test("a link reopens the same variants", () => {
  const hostile = 'a/b#c?"\'<script>&=%20\u202e';
  const variants = [
    { outcome: hostile, changes: { tau: "paule-mandel", where: 'study is not "x/y" or year >= 2010' }, left_out: [9, 7, 9], added: null },
    { outcome: "second", changes: {}, left_out: [], added: { study: hostile, year: 2030, numbers: { estimate: 0.8, se: 0.1 } } },
  ];
  const back = fromFragment("#" + toFragment(variants));
  assert.deepStrictEqual(plain(back[0]), { ...variants[0], left_out: [7, 9] });
  assert.deepStrictEqual(plain(back[1]), variants[1]);
  assert.ok(!/[\s"<>]/.test(toFragment(variants)), "the link needs escapes");
});

test("the plan is a blank link, and damaged links are the plan", () => {
  assert.strictEqual(toFragment([planned("x")]), "");
  for (const link of ["", "#", "#o1-data", "#what-if", "#%%%", "#what-if?outcome=a&added-study={"]) {
    assert.ok(fromFragment(link).every(isPlanned), link);
  }
  assert.deepStrictEqual(plain(fromFragment("#what-if?outcome=a&without-rows=3.x.-1.2")[0].left_out), [2, 3]);
});

test("undo and redo go back and forth, and the log keeps every look once", () => {
  const looks = new Looks(planned("x"));
  const change = (changes) => looks.change({ ...looks.now, changes });
  assert.ok(change({ level: "0.9" }));
  assert.ok(!change({ level: " 0.9 " }), "the same again");
  assert.ok(change({ level: "0.99" }));
  assert.ok(looks.undo() && looks.undo());
  assert.ok(isPlanned(looks.now) && !looks.undo());
  assert.ok(looks.redo());
  assert.strictEqual(looks.now.changes.level, "0.9");
  assert.ok(change({ effects: "common" }));
  assert.ok(!looks.redo(), "a new change ends what was undone");
  assert.deepStrictEqual(plain(looks.log.map((v) => v.changes)), [{ level: "0.9" }, { level: "0.99" }, { effects: "common" }]);
  assert.ok(sameVariant(looks.log[0], { outcome: "x", changes: { level: "0.9", tau: "" }, left_out: [], added: null }));
});
