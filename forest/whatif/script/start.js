// @ts-check
"use strict";

/**
 * What the page offers to those who change an analysis.
 *
 * whatIf.ask(outcomeId, variant) computes a changed analysis, shows it in place of the
 * outcome with that prefix of ids, as "o1", and then sends document the event
 * "whatif:shown" with detail {outcomeId, variant, reply}. It returns the reply; null if a
 * later question about the same outcome overtook it. A reply with a problem and without a
 * document changes nothing on the page; the event comes all the same.
 * whatIf.broken says why nothing can be computed; blank while it can. When the engine
 * breaks, document gets the event "whatif:broken" with detail {reason}.
 * whatIf.sheet is what the engine was given: {version, extraction, plan, outcomes}, the
 * sheet as read, and for each outcome its name as the sheet spells it and its id.
 * The rows of an outcome as shown are in pageOutcome(outcomeId): studies with the mark that
 * data-study holds and the row of the sheet, and left, the rows that are not pooled.
 */
const whatIf = (() => {
  const text = (/** @type {string} */ id) => document.getElementById(id)?.textContent ?? "";
  const sheet = text("sheet");
  const engine = new Engine(text("worker"), text("engine"), sheet);
  const tell = (/** @type {string} */ name, /** @type {any} */ detail) => document.dispatchEvent(new CustomEvent(name, { detail }));
  engine.onbroken = (reason) => {
    const status = document.getElementById("whatif-status");
    if (status) {
      status.textContent = `This page shows the analysis as planned and cannot compute another: ${reason}.`;
      status.hidden = false;
    }
    tell("whatif:broken", { reason });
  };
  return {
    sheet: JSON.parse(sheet),
    engine,
    get broken() {
      return engine.broken;
    },
    start: () => engine.start(),
    /** @param {string} outcomeId @param {Variant} variant @returns {Promise<Reply | null>} */
    ask: async (outcomeId, variant) => {
      const reply = await engine.ask(variant);
      if (reply === null) return null;
      if (reply.document) swap(outcomeId, reply);
      tell("whatif:shown", { outcomeId, variant, reply });
      return reply;
    },
  };
})();

Object.assign(window, { whatIf });
whatIf.start();
