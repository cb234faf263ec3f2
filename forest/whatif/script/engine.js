// @ts-check
"use strict";

/**
 * What the engine answers to a variant. Without a document, problem says why. The rest is
 * what the page shows of the outcome: see swap.
 * @typedef {{document?: any, command?: string, problem?: string, lead?: string,
 *   sections?: {id: string, html: string}[], css?: string, data?: any}} Reply
 * @typedef {{variant: Variant, give: (reply: Reply | null) => void, refuse: (why: Error) => void}} Question
 */

/**
 * The engine of the page, in its worker. It works on one question at a time; of several
 * that wait for the same outcome only the latest is answered.
 */
class Engine {
  /**
   * @param {string} workerScript
   * @param {string} code the packed engine
   * @param {string} sheet JSON of the sheet, the plan and the page's outcomes
   */
  constructor(workerScript, code, sheet) {
    this.workerScript = workerScript;
    this.code = code;
    this.sheet = sheet;
    /** Why the engine cannot answer; blank while it can. */
    this.broken = "";
    /** @type {Worker | null} */
    this.worker = null;
    /** @type {Map<string, Question>} by outcome, the longest waiting first */
    this.waiting = new Map();
    /** @type {Question | null} what the engine works on */
    this.asked = null;
    this.ready = false;
    this.id = 0;
    /** @type {((why: string) => void)} called once, when the engine breaks */
    this.onbroken = () => {};
  }

  /** Starts the engine; questions may be asked before it is ready. */
  start() {
    if (this.worker || this.broken) return;
    try {
      const address = URL.createObjectURL(new Blob([this.workerScript], { type: "text/javascript" }));
      this.worker = new Worker(address);
      this.worker.onmessage = (message) => this.hear(message.data);
      this.worker.onerror = (event) => this.breakDown(event.message || "its worker cannot be started");
      this.worker.postMessage({ open: { code: this.code, data: this.sheet } });
      this.code = ""; // the worker has it
    } catch (error) {
      this.breakDown(error instanceof Error ? error.message : String(error));
    }
  }

  /**
   * Asks for a changed analysis.
   * @param {Variant} variant
   * @returns {Promise<Reply | null>} null if a later question about the same outcome
   *   overtook this one; refused if the engine is broken
   */
  ask(variant) {
    return new Promise((give, refuse) => {
      if (this.broken) {
        refuse(new Error(this.broken));
        return;
      }
      this.waiting.get(variant.outcome)?.give(null);
      this.waiting.delete(variant.outcome);
      this.waiting.set(variant.outcome, { variant, give, refuse });
      this.next();
    });
  }

  /** Takes up the question that has waited longest. */
  next() {
    if (!this.ready || this.asked || !this.worker) return;
    for (const [outcome, question] of this.waiting) {
      this.waiting.delete(outcome);
      this.asked = question;
      this.id++;
      this.worker.postMessage({ ask: question.variant, id: this.id });
      return;
    }
  }

  /** @param {{ready?: boolean, broken?: string, id?: number, reply?: string}} message */
  hear(message) {
    if (message.broken) {
      this.breakDown(message.broken);
      return;
    }
    if (message.ready) this.ready = true;
    const question = this.asked;
    if (question && message.id === this.id && message.reply !== undefined) {
      this.asked = null;
      question.give(JSON.parse(message.reply));
    }
    this.next();
  }

  /** @param {string} why */
  breakDown(why) {
    if (this.broken) return;
    this.broken = why;
    this.worker?.terminate();
    this.worker = null;
    const error = new Error(why);
    this.asked?.refuse(error);
    this.waiting.forEach((question) => question.refuse(error));
    this.asked = null;
    this.waiting.clear();
    this.onbroken(why);
  }
}
