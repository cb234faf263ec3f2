// @ts-check
"use strict";

/**
 * Which act a key means; blank for none. Undo and redo leave a text that is being typed to
 * the browser.
 * @param {{key: string, ctrlKey: boolean, metaKey: boolean, shiftKey: boolean, altKey: boolean}} event
 * @param {boolean} typing
 * @returns {"undo" | "redo" | "plan" | ""}
 */
function actOf(event, typing) {
  if (event.altKey || typing) return "";
  const key = event.key.toLowerCase();
  if (event.ctrlKey || event.metaKey) {
    if (key === "z") return event.shiftKey ? "redo" : "undo";
    return key === "y" && event.ctrlKey ? "redo" : "";
  }
  return key === "escape" && !event.shiftKey ? "plan" : "";
}

/**
 * Whether an element holds a text that is not yet taken over.
 * @param {EventTarget | null} target
 */
function isTyping(target) {
  if (target instanceof HTMLTextAreaElement) return true;
  if (!(target instanceof HTMLInputElement) || !/^(text|search|number)$/.test(target.type)) return false;
  return target.type !== "text" || target.closest(".whatif") === null || (target.dataset.taken ?? "") !== target.value;
}
