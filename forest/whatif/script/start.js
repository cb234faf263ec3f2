// @ts-check
"use strict";

/** How long the page waits for a further change before it works out the late sections, in ms. */
const pauseBeforeRest = 120;

/**
 * What the page offers to those who change an analysis.
 *
 * whatIf.ask(outcomeId, variant) computes a changed analysis, shows it in place of the
 * outcome with that prefix of ids, as "o1", and then sends document the event
 * "whatif:shown" with detail {outcomeId, variant, reply, complete}. It returns the reply;
 * null if a later question about the same outcome overtook it. A reply with a problem and
 * without a document changes nothing on the page; the event comes all the same.
 * Sections that take long come later: they stand as they were and are marked aria-busy
 * until then, and reply.late holds their ids. The same reply object then gets all that the
 * whole answer holds, and the event comes again, with complete true.
 * whatIf.settled() waits until nothing is busy.
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
  /** What is being worked out, by outcome. @type {Map<string, Promise<void>>} */
  const working = new Map();
  /** The latest answer shown, by outcome. @type {Map<string, {variant: Variant, reply: Reply}>} */
  const latest = new Map();
  /** How many questions were asked, by outcome. @type {Map<string, number>} */
  const turns = new Map();

  /** Works out and shows what comes late, unless a further change comes first. @param {string} outcomeId */
  const complete = async (outcomeId) => {
    const turn = turns.get(outcomeId);
    const overtaken = () => turns.get(outcomeId) !== turn || engine.broken !== "";
    await new Promise((done) => setTimeout(done, pauseBeforeRest));
    const shown = latest.get(outcomeId);
    if (overtaken() || !shown) return;
    const whole = await engine.askWhole(shown.variant).catch(() => null); // onbroken says why
    if (!whole?.document || overtaken()) return;
    swapRest(outcomeId, whole);
    Object.assign(shown.reply, whole, { late: [] });
    tell("whatif:shown", { outcomeId, ...shown, complete: true });
  };

  return {
    sheet: JSON.parse(sheet),
    engine,
    get broken() {
      return engine.broken;
    },
    start: () => engine.start(),
    settled: async () => {
      while (working.size > 0) await Promise.all(working.values());
    },
    /** @param {string} outcomeId @param {Variant} variant @returns {Promise<Reply | null>} */
    ask: async (outcomeId, variant) => {
      turns.set(outcomeId, (turns.get(outcomeId) ?? 0) + 1);
      const answer = await engine.ask(variant);
      if (answer === null) return null;
      const reply = { ...answer };
      if (reply.document) {
        latest.set(outcomeId, { variant, reply });
        swap(outcomeId, reply);
      }
      const late = latest.get(outcomeId)?.reply.late ?? [];
      tell("whatif:shown", { outcomeId, variant, reply, complete: late.length === 0 });
      if (late.length > 0) {
        const rest = complete(outcomeId).finally(() => {
          if (working.get(outcomeId) === rest) working.delete(outcomeId);
        });
        working.set(outcomeId, rest);
      }
      return reply;
    },
  };
})();

Object.assign(window, { whatIf });
whatIf.start();
