"use strict";
const fs = require("node:fs");
const path = require("node:path");
const vm = require("node:vm");

/**
 * Runs scripts of the page, which are no modules, and returns some of their names.
 * @param {string} file one of the folder above
 * @param {string[]} names
 * @param {Record<string, unknown>} [globals]
 */
exports.load = (file, names, globals = {}) => {
  const context = vm.createContext({ URLSearchParams, ...globals });
  const text = fs.readFileSync(path.join(__dirname, "..", file), "utf8");
  return vm.runInContext(text + `;({${names.join(",")}})`, context, { filename: file });
};
