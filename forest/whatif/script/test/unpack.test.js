"use strict";
const test = require("node:test");
const assert = require("node:assert");
const { execFileSync } = require("node:child_process");
const { load } = require("./load.js");

const { unpack, fromText } = load("unpack.js", ["unpack", "fromText"]);

/** Packs by the reference program of the format. */
const packed = (bytes, ...options) => new Uint8Array(execFileSync("xz", ["--format=lzma", ...options, "--stdout"], { input: bytes, maxBuffer: 1 << 28 }));

/** A seeded sequence of numbers below 1 (a multiplicative generator of 2³¹ − 1; Park and Miller 1988). */
function seeded(seed) {
  let state = seed;
  return () => (state = (state * 48271) % 2147483647) / 2147483647;
}

function samples() {
  const next = seeded(7);
  const noise = Buffer.from(Array.from({ length: 70000 }, () => Math.floor(next() * 256)));
  const text = Buffer.from(Array.from({ length: 4000 }, () => ["pooled ", "study ", "odds ratio ", "τ² "][Math.floor(next() * 4)]).join(""));
  return { empty: Buffer.alloc(0), one: Buffer.from("a"), text, noise, both: Buffer.concat([text, noise, text]), zeros: Buffer.alloc(300000) };
}

test("what xz packs comes out as it went in", () => {
  for (const [name, bytes] of Object.entries(samples())) {
    for (const options of [["-9e"], ["-1"], ["--lzma1=lc=0,lp=2,pb=0"], ["--lzma1=lc=4,lp=0,pb=4"]]) {
      const back = unpack(packed(bytes, ...options));
      assert.ok(Buffer.from(back).equals(bytes), `${name} ${options}`);
    }
  }
});

test("damage ends in an error or in other bytes, never in a hang", () => {
  const bytes = samples().both;
  const whole = packed(bytes, "-9e");
  const next = seeded(3);
  let refused = 0;
  for (let i = 0; i < 40; i++) {
    const damaged = whole.slice();
    damaged[13 + Math.floor(next() * (whole.length - 13))] ^= 1 + Math.floor(next() * 255);
    try {
      const back = unpack(damaged);
      assert.ok(!Buffer.from(back).equals(bytes));
    } catch {
      refused++;
    }
  }
  assert.ok(refused > 20, `${refused} of 40 refused`);
  assert.throws(() => unpack(whole.slice(0, whole.length / 2)));
  assert.throws(() => unpack(new Uint8Array(5)));
});

test("text that is no base 91 is refused, and its digits are read from the lowest", () => {
  assert.throws(() => fromText("!!<!!"), /damaged at character 2/);
  assert.throws(() => fromText("!!~~"), /damaged at character 2/); // 90 + 91 · 90 is more than 13 bits
  assert.deepStrictEqual([...fromText("!!!!!")], [0, 0, 0, 0]);
  assert.deepStrictEqual([...fromText('#$#$')], [19, 97, 34]); // twice 2 + 3 · 91 = 275: 275 + 275 · 2¹³ = 2253075 = 19 + 97 · 2⁸ + 34 · 2¹⁶
});
