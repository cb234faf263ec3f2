// @ts-check
"use strict";

/** How many whole answers are kept, for undo, redo and the way back to the plan. */
const keptAnswers = 12;

/**
 * The engine of the page. What can be worked out at once is asked of one worker, so that
 * it never waits; the whole answer, which takes longer, of another.
 */
class Engine {
  /**
   * @param {string} script of the workers
   * @param {string} code the packed engine
   * @param {string} sheet JSON of the sheet, the plan and the page's outcomes
   */
  constructor(script, code, sheet) {
    this.script = script;
    this.code = code;
    this.sheet = sheet;
    /** Why the engine cannot answer; blank while it can. */
    this.broken = "";
    /** @type {Lane | null} */
    this.quick = null;
    /** @type {Lane | null} */
    this.thorough = null;
    /** @type {Map<string, Reply>} whole answers by their variants, the oldest first */
    this.known = new Map();
    /** @type {(why: string) => void} called once, when the engine breaks */
    this.onbroken = () => {};
  }

  /** Starts the engine; questions may be asked before it is ready. */
  start() {
    if (this.quick || this.broken) return;
    const broke = (/** @type {string} */ why) => this.breakDown(why);
    const quick = new Lane(this.script, broke);
    const thorough = new Lane(this.script, broke);
    if (this.broken) return;
    [this.quick, this.thorough] = [quick, thorough];
    quick.onready = (module) => {
      thorough.open({ ...(module ? { module } : { code: this.code }), data: this.sheet });
      this.code = "";
    };
    quick.open({ code: this.code, data: this.sheet });
  }

  /**
   * Asks for a changed analysis, as far as it is worked out at once; all of it if it was
   * looked at before.
   * @param {Variant} variant
   * @returns {Promise<Reply | null>} null if a later question about the same outcome
   *   overtook this one; refused if the engine is broken
   */
  async ask(variant) {
    const known = this.known.get(keyOf(variant));
    this.thorough?.drop(variant.outcome);
    if (known) {
      this.quick?.drop(variant.outcome);
      return known;
    }
    return this.lane(this.quick).ask({ ...variant, first: true, narrow: isNarrow() });
  }

  /**
   * Asks for all of a changed analysis.
   * @param {Variant} variant
   * @returns {Promise<Reply | null>} as ask
   */
  async askWhole(variant) {
    const key = keyOf(variant);
    const known = this.known.get(key);
    if (known) return known;
    const reply = await this.lane(this.thorough).ask(variant);
    if (reply?.document) {
      this.known.set(key, reply);
      for (const oldest of this.known.keys()) {
        if (this.known.size <= keptAnswers) break;
        this.known.delete(oldest);
      }
    }
    return reply;
  }

  /** @param {Lane | null} lane @returns {Lane} */
  lane(lane) {
    if (this.broken || !lane) throw new Error(this.broken || "the engine was not started");
    return lane;
  }

  /** @param {string} why */
  breakDown(why) {
    if (this.broken) return;
    this.broken = why;
    this.quick?.breakDown(why);
    this.thorough?.breakDown(why);
    this.onbroken(why);
  }
}

/** Whether the page shows the narrow forms of its charts. */
function isNarrow() {
  return Array.from(document.querySelectorAll("figure > .narrow")).some((e) => e.getClientRects().length > 0);
}

/** @param {Variant} variant */
function keyOf(variant) {
  return JSON.stringify(tidied(variant));
}
