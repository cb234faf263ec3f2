"use strict";
const test = require("node:test");
const assert = require("node:assert");
const { load } = require("./load.js");

const { actOf } = load("keys.js", ["actOf"]);
const press = (key, modifiers = {}) => ({ key, ctrlKey: false, metaKey: false, shiftKey: false, altKey: false, ...modifiers });

test("keys mean undo, redo and back to the plan", () => {
  for (const modifier of ["ctrlKey", "metaKey"]) {
    assert.strictEqual(actOf(press("z", { [modifier]: true }), false), "undo");
    assert.strictEqual(actOf(press("Z", { [modifier]: true, shiftKey: true }), false), "redo");
  }
  assert.strictEqual(actOf(press("y", { ctrlKey: true }), false), "redo");
  assert.strictEqual(actOf(press("Escape"), false), "plan");
});

test("other keys, and a text being typed, are the browser's", () => {
  for (const event of [press("z"), press("y", { metaKey: true }), press("Escape", { altKey: true }), press("a", { ctrlKey: true }), press("Escape", { shiftKey: true })]) {
    assert.strictEqual(actOf(event, false), "", JSON.stringify(event));
  }
  assert.strictEqual(actOf(press("z", { ctrlKey: true }), true), "");
  assert.strictEqual(actOf(press("Escape"), true), "");
});
