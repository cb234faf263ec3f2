// @ts-check
"use strict";

/**
 * What a reader can do from the banner.
 * @typedef {{undo: () => void, redo: () => void, plan: () => void, show: (v: Variant) => void}} Acts
 * A variant that was looked at, with its answer.
 * @typedef {{variant: Variant, words: string[], facts: Facts | null}} Look
 */

/** Says in words what differs from the plan, and sets both answers side by side. */
class Banner {
  /**
   * @param {HTMLElement} section the outcome's controls
   * @param {string} id of the outcome
   * @param {Acts} acts
   */
  constructor(section, id, acts) {
    this.id = id;
    this.acts = acts;
    this.says = make("p", { class: "wi-says" });
    this.table = make("div", { class: "wi-compare", hidden: true });
    this.undo = makeButton("Undo", acts.undo, { "aria-keyshortcuts": "Control+Z Meta+Z" });
    this.redo = makeButton("Redo", acts.redo, { "aria-keyshortcuts": "Control+Shift+Z Meta+Shift+Z" });
    this.back = makeButton("Back to the plan", acts.plan, { class: "wi-back", "aria-keyshortcuts": "Escape" });
    this.log = make("details", { class: "wi-log", hidden: true });
    this.live = make("p", { class: "vh", role: "status" });
    const keys = make("p", { class: "wi-keys" }, "Keys: ", make("kbd", {}, "Esc"), " back to the plan · ", make("kbd", {}, "Ctrl Z"), " undo · ", make("kbd", {}, "Ctrl Shift Z"), " redo (⌘ on a Mac)");
    this.state = make("div", { class: "wi-state" }, this.says, this.table, make("div", { class: "wi-bar" }, this.undo, this.redo, this.back, keys));
    section.querySelector(".wi-groups")?.before(this.state);
    section.append(this.log, this.live);
    this.strip = make("div", { class: "wi-strip", role: "region", "aria-label": "What differs from the plan", hidden: true });
    byId(id)?.append(this.strip);
    this.enlist();
    // Where the table is in the window, the strip would say the same again.
    new IntersectionObserver(([seen]) => this.strip.classList.toggle("wi-seen", seen.isIntersecting)).observe(this.table);
  }

  /**
   * @param {Look} now
   * @param {Facts | null} planned
   * @param {Look[]} looks the latest
   * @param {number} total of all looks
   * @param {{undo: boolean, redo: boolean}} can
   */
  show(now, planned, looks, total, can) {
    const changed = now.words.length > 0;
    this.enable(this.undo, can.undo);
    this.enable(this.redo, can.redo);
    this.enable(this.back, changed);
    this.says.replaceChildren(...this.sentence(now.words));
    this.says.classList.toggle("wi-not", changed);
    this.table.hidden = !changed;
    this.table.replaceChildren(...(changed ? [comparedTable(comparedOf(planned, now.facts))] : []));
    byId(this.id)?.classList.toggle("wi-changed", changed);
    this.tag(now.words);
    this.showStrip(now, planned);
    this.showLog(looks, total);
  }

  /**
   * A button that cannot act now keeps the focus, so that a key pressed again does not
   * land elsewhere.
   * @param {HTMLButtonElement} button
   * @param {boolean} on
   */
  enable(button, on) {
    button.setAttribute("aria-disabled", String(!on));
  }

  /** @param {string[]} words @returns {(Node | string)[]} */
  sentence(words) {
    if (words.length === 0) return ["This is the analysis as planned."];
    return [make("b", {}, "Not the plan: "), words.join("; ") + "."];
  }

  /** Marks the opening sentence and the answer. @param {string[]} words */
  tag(words) {
    for (const place of [byId(this.id + "-lead"), byId(this.id + "-answer")]) {
      place?.querySelector(":scope > .wi-tag")?.remove();
      if (words.length > 0) place?.prepend(make("p", { class: "wi-tag" }, ...this.sentence(words)));
    }
    const lead = byId(this.id + "-lead");
    if (lead !== null && lead.querySelector(".wi-invite") === null) lead.append(make("p", { class: "wi-invite" }, this.link()));
  }

  /** A link to the controls. */
  link() {
    return make("a", { href: `#${this.id}-whatif` }, "What if …?");
  }

  /** Names the controls among the page's contents. */
  enlist() {
    document.querySelector(`nav.toc a[href="#${this.id}"] + ol`)?.prepend(make("li", { class: "wi-invite" }, this.link()));
  }

  /** Takes away what leads to controls that can do nothing. */
  close() {
    for (const e of document.querySelectorAll(`.wi-invite:has([href="#${this.id}-whatif"])`)) e.remove();
  }

  /** @param {Look} now @param {Facts | null} planned */
  showStrip(now, planned) {
    this.strip.hidden = now.words.length === 0;
    if (this.strip.hidden) return this.strip.replaceChildren();
    const focused = this.strip.contains(document.activeElement);
    const text = make("p", {}, make("b", {}, "What if: "), inShort(planned, now.facts));
    if (planned !== null) text.append(" ", make("span", { class: "wi-plan" }, `Plan: ${planned.estimate} (${planned.interval})${planned.steps === undefined ? "" : `, ${planned.steps} steps`}.`));
    const button = makeButton("Back to the plan", this.acts.plan, { class: "wi-back" });
    this.strip.replaceChildren(text, make("a", { href: `#${this.id}-whatif` }, changesText(now.words.length)), button);
    if (focused) button.focus({ preventScroll: true });
  }

  /**
   * Lists the latest variants; the exported result has all of them.
   * @param {Look[]} looks the latest
   * @param {number} total of all
   */
  showLog(looks, total) {
    this.log.hidden = total === 0;
    const list = make("ol", { start: String(total - looks.length + 1) });
    for (const look of looks) {
      const again = makeButton("Show again", () => this.acts.show(look.variant), { "aria-label": "Show again: " + look.words.join("; ") });
      list.append(make("li", {}, capitalised(look.words.join("; ")) + ": ", inShort(null, look.facts), " ", again));
    }
    const open = this.log.hasAttribute("open");
    const focused = this.log.contains(document.activeElement);
    const summary = make("summary", {}, `${total} ${total === 1 ? "variant" : "variants"} looked at`);
    this.log.replaceChildren(summary, make("p", { class: "wi-help" }, "Who looks at many analyses and shows one has chosen among them: say how many were looked at. This list goes with every exported result."), list);
    this.log.toggleAttribute("open", open);
    if (focused) summary.focus({ preventScroll: true });
  }

  /** Tells those who listen. @param {string} text */
  announce(text) {
    this.live.textContent = text;
  }
}

/** @param {number} n */
function changesText(n) {
  return n === 1 ? "1 difference" : `${n} differences`;
}

/** @param {Compared[]} lines */
function comparedTable(lines) {
  const head = make("tr", {}, ...["", "As planned", "What if", "Difference"].map((text) => make("th", { scope: "col" }, text || make("span", { class: "vh" }, "What"))));
  const body = make("tbody", {});
  for (const line of lines) {
    body.append(make("tr", {}, make("th", { scope: "row" }, line.what), make("td", {}, line.planned), make("td", { class: "wi-now" }, line.now), make("td", {}, line.change)));
  }
  return make("table", {}, make("caption", { class: "vh" }, "The plan and the change side by side"), make("thead", {}, head), body);
}
