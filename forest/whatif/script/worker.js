// @ts-check
"use strict";

/**
 * The worker behind a report page: it unpacks and starts the engine, hands it the page's
 * data, and answers one change after another. What it is sent and what it sends:
 *   {open: {code, data}} → {ready: true, module} or {broken: why}; with the module of
 *     another worker in place of code, it need not be unpacked and compiled again
 *   {ask: change, id}    → {id, reply} with the reply's JSON as text, or {broken: why}
 * The two functions are set by the engine itself.
 * @type {any}
 */
const scope = self;

/**
 * @param {{code?: string, module?: WebAssembly.Module, data: string}} page
 * @returns {Promise<WebAssembly.Module>}
 */
async function start(page) {
  const go = new scope.Go();
  const module = page.module ?? (await WebAssembly.compile(/** @type {Uint8Array<ArrayBuffer>} */ (unpack(fromText(page.code ?? "")))));
  const instance = await WebAssembly.instantiate(module, go.importObject);
  go.run(instance).then(() => scope.postMessage({ broken: "the engine ended" })); // it runs on, and waits for questions
  const problem = scope.steelyardOpen(page.data);
  if (problem) throw new Error(problem);
  return module;
}

/** Says that the engine is ready. @param {WebAssembly.Module} module */
function tellReady(module) {
  try {
    scope.postMessage({ ready: true, module });
  } catch {
    scope.postMessage({ ready: true }); // a browser that hands no modules on
  }
}

scope.onmessage = async (/** @type {MessageEvent} */ message) => {
  const { open, ask, id } = message.data;
  try {
    if (open) {
      tellReady(await start(open));
    } else {
      scope.postMessage({ id, reply: scope.steelyardAnswer(JSON.stringify(ask)) });
    }
  } catch (error) {
    scope.postMessage({ broken: error instanceof Error ? error.message : String(error) });
  }
};
