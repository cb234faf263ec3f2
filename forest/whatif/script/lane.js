// @ts-check
"use strict";

/**
 * What the engine answers to a variant. Without a document, problem says why. The rest is
 * what the page shows of the outcome: see swap.
 * @typedef {{document?: any, command?: string, problem?: string, lead?: string, late?: string[],
 *   sections?: {id: string, html: string}[], css?: string, data?: any}} Reply
 * @typedef {Variant & {first?: boolean, narrow?: boolean}} Asked a variant; first asks only
 *   for what is worked out at once, and of charts with two forms for one, the narrow or not
 * @typedef {{asked: Asked, give: (reply: Reply | null) => void, refuse: (why: Error) => void}} Question
 */

/**
 * A worker that answers one question at a time; of several that wait for the same
 * outcome only the latest is answered.
 */
class Lane {
  /**
   * @param {string} script of the worker
   * @param {(why: string) => void} onbroken called once, when it cannot answer any more
   */
  constructor(script, onbroken) {
    this.onbroken = onbroken;
    this.broken = "";
    this.ready = false;
    /** @type {Map<string, Question>} by outcome, the longest waiting first */
    this.waiting = new Map();
    /** @type {Question | null} what it works on */
    this.working = null;
    this.id = 0;
    /** @type {(module: WebAssembly.Module | undefined) => void} */
    this.onready = () => {};
    /** @type {Worker | null} */
    this.worker = null;
    try {
      this.worker = new Worker(URL.createObjectURL(new Blob([script], { type: "text/javascript" })));
      this.worker.onmessage = (message) => this.hear(message.data);
      this.worker.onerror = (event) => this.breakDown(event.message || "its worker cannot be started");
    } catch (error) {
      this.breakDown(error instanceof Error ? error.message : String(error));
    }
  }

  /** @param {{code?: string, module?: WebAssembly.Module, data: string}} page */
  open(page) {
    this.worker?.postMessage({ open: page });
  }

  /** @param {Asked} asked @returns {Promise<Reply | null>} null if a later question overtook it */
  ask(asked) {
    return new Promise((give, refuse) => {
      if (this.broken) {
        refuse(new Error(this.broken));
        return;
      }
      this.drop(asked.outcome);
      this.waiting.set(asked.outcome, { asked, give, refuse });
      this.next();
    });
  }

  /** Gives up a question that still waits. @param {string} outcome */
  drop(outcome) {
    this.waiting.get(outcome)?.give(null);
    this.waiting.delete(outcome);
  }

  /** Takes up the question that has waited longest. */
  next() {
    if (!this.ready || this.working || !this.worker) return;
    for (const [outcome, question] of this.waiting) {
      this.waiting.delete(outcome);
      this.working = question;
      this.id++;
      this.worker.postMessage({ ask: question.asked, id: this.id });
      return;
    }
  }

  /** @param {{ready?: boolean, module?: WebAssembly.Module, broken?: string, id?: number, reply?: string}} message */
  hear(message) {
    if (message.broken) {
      this.breakDown(message.broken);
      return;
    }
    if (message.ready) {
      this.ready = true;
      this.onready(message.module);
    }
    const question = this.working;
    if (question && message.id === this.id && message.reply !== undefined) {
      this.working = null;
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
    this.working?.refuse(error);
    this.waiting.forEach((question) => question.refuse(error));
    this.working = null;
    this.waiting.clear();
    this.onbroken(why);
  }
}
