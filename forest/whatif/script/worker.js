// @ts-check
"use strict";

/**
 * The worker behind a report page: it unpacks and starts the engine, hands it the page's
 * data, and answers one change after another. What it is sent and what it sends:
 *   {open: {code, data}} → {ready: true} or {broken: why}
 *   {ask: change, id}    → {id, reply} with the reply's JSON as text, or {broken: why}
 * The two functions are set by the engine itself.
 * @type {any}
 */
const scope = self;

/** @param {{code: string, data: string}} page */
async function start(page) {
  const go = new scope.Go();
  const code = /** @type {Uint8Array<ArrayBuffer>} */ (unpack(fromText(page.code)));
  const instance = await WebAssembly.instantiate(await WebAssembly.compile(code), go.importObject);
  go.run(instance).then(() => scope.postMessage({ broken: "the engine ended" })); // it runs on, and waits for questions
  const problem = scope.steelyardOpen(page.data);
  if (problem) throw new Error(problem);
}

scope.onmessage = async (/** @type {MessageEvent} */ message) => {
  const { open, ask, id } = message.data;
  try {
    if (open) {
      await start(open);
      scope.postMessage({ ready: true });
    } else {
      scope.postMessage({ id, reply: scope.steelyardAnswer(JSON.stringify(ask)) });
    }
  } catch (error) {
    scope.postMessage({ broken: error instanceof Error ? error.message : String(error) });
  }
};
