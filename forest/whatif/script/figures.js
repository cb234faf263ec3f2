// @ts-check
"use strict";

/** A figure of the page as files: it is always light, and says what differs from the plan. */
const figureInk = "#1A1A1A";
const figureSoft = "#595959";
/** Pixels per point: 300 to the inch. */
const figurePixels = 300 / 72;
const mostFigurePixels = 40e6;

/**
 * A chart of the page as an image file of its own.
 * @param {SVGSVGElement} chart
 * @param {string[]} notes lines to set below it
 * @returns {SVGSVGElement}
 */
function standalone(chart, notes) {
  const copy = /** @type {SVGSVGElement} */ (chart.cloneNode(true));
  const [, , width, height] = (copy.getAttribute("viewBox") ?? "0 0 1 1").split(/\s+/).map(Number);
  for (const e of copy.querySelectorAll(".hit")) e.remove();
  for (const e of copy.querySelectorAll("[class]")) e.removeAttribute("class");
  for (const e of copy.querySelectorAll("text:not([fill])")) e.setAttribute("fill", figureInk);
  for (const e of copy.querySelectorAll("path:not([fill])")) e.setAttribute("fill", "none");
  const lines = notes.flatMap((note) => wrapped(note, Math.floor(width / 3.45)));
  const tall = height + (lines.length > 0 ? 6 + 9.2 * lines.length : 0);
  const at = (/** @type {Record<string, string | number>} */ attributes, /** @type {SVGElement} */ e) => {
    for (const [name, value] of Object.entries(attributes)) e.setAttribute(name, String(value));
    return e;
  };
  const svg = (/** @type {string} */ name) => document.createElementNS("http://www.w3.org/2000/svg", name);
  copy.prepend(at({ x: 0, y: 0, width, height: tall, fill: "#FFFFFF" }, svg("rect")));
  lines.forEach((line, i) => {
    const text = at({ x: 3, y: height + 6 + 9.2 * i, "font-size": 6.75, fill: figureSoft }, svg("text"));
    text.textContent = line;
    copy.append(text);
  });
  copy.removeAttribute("class");
  at({ xmlns: "http://www.w3.org/2000/svg", viewBox: `0 0 ${width} ${tall}`, width: `${width}pt`, height: `${tall}pt` }, copy);
  return copy;
}

/**
 * Lines of at most so many characters, broken between words where that can be.
 * @param {string} text
 * @param {number} most
 * @returns {string[]}
 */
function wrapped(text, most) {
  /** @type {string[]} */
  const lines = [];
  let line = "";
  for (let word of text.split(/\s+/).filter(Boolean)) {
    if (line !== "" && line.length + 1 + word.length > most) {
      lines.push(line);
      line = "";
    }
    for (; word.length > most; word = word.slice(most)) lines.push(word.slice(0, most));
    line += (line === "" ? "" : " ") + word;
  }
  return line === "" ? lines : [...lines, line];
}

/**
 * The charts of a figure, in the form for print where it has both.
 * @param {Element} figure
 * @returns {SVGSVGElement[]}
 */
function chartsOf(figure) {
  const wide = figure.querySelector(".wide");
  return Array.from((wide ?? figure).querySelectorAll("svg.chart"));
}

/** @param {SVGSVGElement} image @returns {string} */
function svgText(image) {
  return '<?xml version="1.0" encoding="UTF-8"?>\n' + new XMLSerializer().serializeToString(image) + "\n";
}

/**
 * Draws an image in pixels; an error where it would be too large to handle.
 * @param {SVGSVGElement} image
 * @returns {Promise<Blob>}
 */
async function png(image) {
  const [, , width, height] = (image.getAttribute("viewBox") ?? "").split(/\s+/).map(Number);
  const size = [Math.round(width * figurePixels), Math.round(height * figurePixels)];
  if (size[0] * size[1] > mostFigurePixels) throw new Error("the figure is too large for pixels; take the SVG");
  const picture = new Image();
  picture.src = "data:image/svg+xml;charset=utf-8," + encodeURIComponent(new XMLSerializer().serializeToString(image));
  await picture.decode();
  const canvas = document.createElement("canvas");
  [canvas.width, canvas.height] = size;
  canvas.getContext("2d")?.drawImage(picture, 0, 0, size[0], size[1]);
  return new Promise((give, refuse) => canvas.toBlob((blob) => (blob === null ? refuse(new Error("the browser draws no PNG")) : give(blob)), "image/png"));
}
