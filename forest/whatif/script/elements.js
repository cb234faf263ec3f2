// @ts-check
"use strict";

/**
 * Makes an element. Texts enter as text alone, never as markup; a handler is a property
 * "onclick", a flag that is false is left out.
 * @param {string} name
 * @param {Record<string, string | boolean | ((event: Event) => void)>} [properties]
 * @param {...(Node | string)} children
 * @returns {HTMLElement}
 */
function make(name, properties = {}, ...children) {
  const e = document.createElement(name);
  for (const [key, value] of Object.entries(properties)) {
    if (typeof value === "function") e.addEventListener(key.slice(2), value);
    else if (value === true) e.setAttribute(key, "");
    else if (value !== false) e.setAttribute(key, value);
  }
  e.append(...children);
  return e;
}

/**
 * A button that acts.
 * @param {string} text
 * @param {() => void} act
 * @param {Record<string, string>} [properties]
 * @returns {HTMLButtonElement}
 */
function makeButton(text, act, properties = {}) {
  return /** @type {HTMLButtonElement} */ (make("button", { type: "button", onclick: act, ...properties }, text));
}

/**
 * The element of an id.
 * @param {string} id
 */
function byId(id) {
  return document.getElementById(id);
}

/**
 * Input elements within a root.
 * @param {ParentNode} root
 * @param {string} selector
 * @returns {HTMLInputElement[]}
 */
function inputsIn(root, selector) {
  return Array.from(root.querySelectorAll(selector));
}
