// @ts-check
"use strict";

/**
 * Where the keyboard was before the sections were replaced: the mark of a control that is
 * made anew, its number among its kind, and its height in the window.
 * @typedef {{again: string, index: number, top: number, element: Element}} Spot
 */

/** @returns {Spot | null} */
function spotNow() {
  const e = document.activeElement;
  if (!(e instanceof HTMLElement) || e === document.body) return null;
  const again = e.dataset.again ?? "";
  const index = again === "" ? -1 : Array.from(e.closest(".wi-rows, tbody")?.querySelectorAll("[data-again]") ?? []).indexOf(e);
  return { again, index, top: e.getBoundingClientRect().top, element: e };
}

/**
 * Gives the keyboard back to where it was, at the same height in the window. A row that is
 * gone from the chart hands it to its neighbour.
 * @param {Spot | null} spot
 * @param {string} id of the outcome
 */
function returnTo(spot, id) {
  if (spot === null) return;
  let e = /** @type {HTMLElement | null} */ (spot.element.isConnected ? spot.element : null);
  if (e === null && spot.again !== "") e = again(spot, id);
  if (e === null) return;
  if (document.activeElement !== e) {
    if (e.closest(".wi-rows")) for (const other of e.parentElement?.children ?? []) other.setAttribute("tabindex", other === e ? "0" : "-1");
    e.focus({ preventScroll: true });
  }
  const moved = e.getBoundingClientRect().top - spot.top;
  if (Math.abs(moved) > 1) window.scrollBy({ top: moved, behavior: "instant" });
}

/** @param {Spot} spot @param {string} id @returns {HTMLElement | null} */
function again(spot, id) {
  const root = byId(id);
  if (root === null) return null;
  const all = /** @type {HTMLElement[]} */ (Array.from(root.querySelectorAll("[data-again]"))).filter((e) => e.getClientRects().length > 0);
  const same = all.find((e) => e.dataset.again === spot.again);
  if (same !== undefined) return same;
  const kind = spot.again.split(" ")[0];
  const siblings = all.filter((e) => e.dataset.again?.startsWith(kind + " "));
  return siblings[Math.min(spot.index, siblings.length - 1)] ?? root.querySelector(".wi-bar button");
}
