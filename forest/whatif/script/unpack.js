// @ts-check
"use strict";

/**
 * Text to bytes: base 91 over printable characters that need no escape in HTML, two
 * characters for 13 bits, the lowest bits and digits first; a last single one holds 6.
 * @param {string} text
 * @returns {Uint8Array}
 */
function fromText(text) {
  const digits = digitsOf91();
  const clean = text.trim();
  const digitAt = (/** @type {number} */ i) => {
    const digit = digits[clean.charCodeAt(i)] ?? -1;
    if (digit < 0) throw new Error("the engine's text is damaged at character " + i);
    return digit;
  };
  const pairs = Math.floor(clean.length / 2);
  const bytes = new Uint8Array(Math.floor((pairs * 13 + (clean.length % 2) * 6) / 8));
  let at = 0;
  let waiting = 0;
  let bits = 0;
  for (let i = 0; i < clean.length; i += 2) {
    const single = i + 1 === clean.length;
    const value = digitAt(i) + (single ? 0 : 91 * digitAt(i + 1));
    if (value >= 8192) throw new Error("the engine's text is damaged at character " + i);
    waiting |= value << bits;
    for (bits += single ? 6 : 13; bits >= 8; bits -= 8) {
      bytes[at++] = waiting & 255;
      waiting >>= 8;
    }
  }
  return bytes;
}

/** The value of each character, by its code; −1 for one that is no digit. */
function digitsOf91() {
  const digits = new Int8Array(128).fill(-1);
  let next = 0;
  for (let code = 33; code < 127; code++) {
    if (!"<&`".includes(String.fromCharCode(code))) digits[code] = next++;
  }
  return digits;
}

/**
 * Unpacks a file of the format .lzma that ends in an end mark, as xz writes them (LZMA
 * specification, version of 2015).
 * @param {Uint8Array} packed
 * @returns {Uint8Array}
 */
function unpack(packed) {
  if (packed.length < 18 || packed[0] >= 225) throw new Error("the engine is not packed as expected");
  return new Unpacker(packed).run();
}

class Unpacker {
  /** @param {Uint8Array} packed */
  constructor(packed) {
    this.packed = packed;
    const properties = packed[0]; // (pb · 5 + lp) · 9 + lc
    this.at = 14; // behind the header and the first byte of the range coder, which is 0
    this.code = 0;
    this.range = 0xffffffff;
    for (let i = 0; i < 4; i++) this.code = ((this.code << 8) | packed[this.at++]) >>> 0;
    this.lc = properties % 9;
    const rest = Math.floor(properties / 9);
    this.lpMask = (1 << rest % 5) - 1;
    this.pbMask = (1 << Math.floor(rest / 5)) - 1;
    this.out = new Uint8Array(packed.length * 6);
    this.literals = evens(0x300 << (this.lc + (rest % 5)));
    this.isMatch = evens(12 << 4);
    this.isRepeat = evens(12);
    this.isRepeat0 = evens(12);
    this.isRepeat1 = evens(12);
    this.isRepeat2 = evens(12);
    this.isLong = evens(12 << 4);
    this.slots = evens(4 << 6);
    this.special = evens(115);
    this.align = evens(16);
    this.lengths = new Lengths();
    this.repeatLengths = new Lengths();
  }

  /** @param {Uint16Array} chances @param {number} i @returns {number} a bit */
  bit(chances, i) {
    const chance = chances[i];
    const bound = (this.range >>> 11) * chance;
    let bit = 0;
    if (this.code < bound) {
      this.range = bound;
      chances[i] = chance + ((2048 - chance) >> 5);
    } else {
      this.range = (this.range - bound) >>> 0;
      this.code = (this.code - bound) >>> 0;
      chances[i] = chance - (chance >> 5);
      bit = 1;
    }
    if (this.range < 0x1000000) this.refill();
    return bit;
  }

  refill() {
    if (this.at > this.packed.length) throw new Error("the engine is cut short");
    this.range = (this.range << 8) >>> 0;
    this.code = ((this.code << 8) | this.packed[this.at++]) >>> 0;
  }

  /** @param {number} count @returns {number} bits of even chance */
  plain(count) {
    let value = 0;
    for (; count > 0; count--) {
      this.range >>>= 1;
      const bit = this.code >= this.range ? 1 : 0;
      if (bit) this.code = (this.code - this.range) >>> 0;
      value = value * 2 + bit;
      if (this.range < 0x1000000) this.refill();
    }
    return value;
  }

  /** @param {Uint16Array} chances @param {number} offset @param {number} bits */
  tree(chances, offset, bits) {
    let node = 1;
    for (let i = 0; i < bits; i++) node = (node << 1) | this.bit(chances, offset + node);
    return node - (1 << bits);
  }

  /** @param {Uint16Array} chances @param {number} offset @param {number} bits the lowest first */
  reverse(chances, offset, bits) {
    let node = 1;
    let value = 0;
    for (let i = 0; i < bits; i++) {
      const bit = this.bit(chances, offset + node);
      node = (node << 1) | bit;
      value |= bit << i;
    }
    return value;
  }

  /** @param {number} n */
  room(n) {
    if (n <= this.out.length) return;
    if (n > 1 << 27) throw new Error("the engine is larger than any");
    const larger = new Uint8Array(Math.max(n, this.out.length * 2));
    larger.set(this.out);
    this.out = larger;
  }

  /** @param {number} at @param {number} state @param {number} distance @returns {number} a byte */
  literal(at, state, distance) {
    const before = at > 0 ? this.out[at - 1] : 0;
    const offset = 0x300 * (((at & this.lpMask) << this.lc) + (before >> (8 - this.lc)));
    let symbol = 1;
    if (state >= 7) {
      let other = this.out[at - distance - 1];
      do {
        const expected = (other >> 7) & 1;
        other = (other << 1) & 0xff;
        const bit = this.bit(this.literals, offset + ((1 + expected) << 8) + symbol);
        symbol = (symbol << 1) | bit;
        if (expected !== bit) break;
      } while (symbol < 0x100);
    }
    while (symbol < 0x100) symbol = (symbol << 1) | this.bit(this.literals, offset + symbol);
    return symbol & 0xff;
  }

  /** @param {number} length above the least @returns {number} distance less one; 2³² − 1 ends the data */
  distance(length) {
    const slot = this.tree(this.slots, Math.min(length, 3) << 6, 6);
    if (slot < 4) return slot;
    const bits = (slot >> 1) - 1;
    const base = (2 | (slot & 1)) * 2 ** bits;
    if (slot < 14) return base + this.reverse(this.special, base - slot, bits);
    return base + this.plain(bits - 4) * 16 + this.reverse(this.align, 0, 4);
  }

  run() {
    let state = 0;
    let at = 0;
    const last = [0, 0, 0, 0]; // distances, the latest first
    for (;;) {
      const place = at & this.pbMask;
      if (!this.bit(this.isMatch, (state << 4) + place)) {
        this.room(at + 1);
        this.out[at] = this.literal(at, state, last[0]);
        at++;
        state = state < 4 ? 0 : state < 10 ? state - 3 : state - 6;
        continue;
      }
      let length;
      if (!this.bit(this.isRepeat, state)) {
        length = this.lengths.read(this, place);
        const distance = this.distance(length);
        if (distance === 0xffffffff) break;
        last.pop();
        last.unshift(distance);
        state = state < 7 ? 7 : 10;
      } else {
        if (!this.bit(this.isRepeat0, state)) {
          if (!this.bit(this.isLong, (state << 4) + place)) {
            this.copy(at, 1, last[0]);
            at++;
            state = state < 7 ? 9 : 11;
            continue;
          }
        } else {
          const which = !this.bit(this.isRepeat1, state) ? 1 : 2 + this.bit(this.isRepeat2, state);
          last.unshift(last.splice(which, 1)[0]);
        }
        length = this.repeatLengths.read(this, place);
        state = state < 7 ? 8 : 11;
      }
      this.copy(at, length + 2, last[0]);
      at += length + 2;
    }
    return this.out.subarray(0, at);
  }

  /** @param {number} at @param {number} length @param {number} distance less one */
  copy(at, length, distance) {
    if (distance >= at) throw new Error("the engine is damaged");
    this.room(at + length);
    for (let i = 0; i < length; i++) this.out[at + i] = this.out[at + i - distance - 1];
  }
}

class Lengths {
  constructor() {
    this.choice = evens(2);
    this.low = evens(16 << 3);
    this.middle = evens(16 << 3);
    this.high = evens(256);
  }

  /** @param {Unpacker} from @param {number} place @returns {number} the length less 2 */
  read(from, place) {
    if (!from.bit(this.choice, 0)) return from.tree(this.low, place << 3, 3);
    if (!from.bit(this.choice, 1)) return 8 + from.tree(this.middle, place << 3, 3);
    return 16 + from.tree(this.high, 0, 8);
  }
}

/** @param {number} count @returns {Uint16Array} chances of one half */
function evens(count) {
  return new Uint16Array(count).fill(1024);
}
