"use strict";
const test = require("node:test");
const assert = require("node:assert");
const { load } = require("./load.js");

const { wrapped } = load("figures.js", ["wrapped"]);

test("lines hold every word in order and none is too long", () => {
  const text = "What if, not the plan: effects common; 2 trials left out: Nguyễn, Ålund. 3 variants were looked at.";
  for (const most of [12, 20, 37, 200]) {
    const lines = [...wrapped(text, most)];
    assert.strictEqual(lines.join(" "), text);
    assert.ok(lines.every((line) => line.length <= most), `${most}: ${lines}`);
  }
});

test("a word longer than a line is cut, a blank text has no line", () => {
  assert.deepStrictEqual([...wrapped("abcdefgh ij", 3)], ["abc", "def", "gh", "ij"]);
  assert.deepStrictEqual([...wrapped("  ", 3)], []);
});
