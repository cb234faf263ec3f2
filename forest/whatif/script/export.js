// @ts-check
"use strict";

/**
 * What an exported result holds: the answer as the program writes it, how it was asked
 * for, the plan's answer, and every variant that was looked at.
 * @param {Look} now
 * @param {Facts | null} planned
 * @param {Look[]} looks
 * @param {Reply} reply
 */
function exported(now, planned, looks, reply) {
  const answer = (/** @type {Facts | null} */ f) => f ?? "no result";
  return {
    format: "steelyard-what-if/1",
    note: now.words.length === 0 ? "The analysis as planned." : "Not the analysis as planned. Choosing among many looks is itself a bias: looked_at lists them all.",
    outcome: now.variant.outcome,
    variant: now.variant,
    differs_from_plan: now.words,
    command: reply.command ?? "",
    planned: answer(planned),
    shown: answer(now.facts),
    looked_at: { count: looks.length, variants: looks.map((l) => ({ variant: l.variant, differs_from_plan: l.words, answer: answer(l.facts) })) },
    result: reply.document,
  };
}

/** Folded below the controls: the result, the link, the command and the figures. */
class Export {
  /**
   * @param {HTMLElement} section
   * @param {string} id of the outcome
   * @param {{json: () => string, link: () => string, command: () => string, notes: () => string[], say: (text: string) => void}} of
   */
  constructor(section, id, of) {
    this.id = id;
    this.of = of;
    this.command = make("code", { class: "wi-command" });
    this.copyCommand = makeButton("Copy", () => this.copy(this.of.command(), "The command"), { "aria-label": "Copy the command" });
    this.figures = /** @type {HTMLSelectElement} */ (make("select", { id: id + "-wi-figure", autocomplete: "off" }));
    const bar = make("div", { class: "wi-bar" }, makeButton("Result as JSON", () => this.json()), makeButton("Copy a link to this state", () => this.copy(this.of.link(), "The link")));
    const figure = make("div", { class: "wi-bar" }, make("label", { for: id + "-wi-figure" }, "Figure"), this.figures, makeButton("SVG", () => this.draw("svg")), makeButton("PNG", () => this.draw("png")));
    const command = make("div", { class: "wi-cli" }, make("p", { class: "wi-help" }, "The same on a command line:"), this.command, this.copyCommand);
    this.box = make("details", { class: "wi-export" }, make("summary", {}, "Export: result, link, command, figures"), make("div", { class: "wi-in" }, bar, figure, command));
    section.append(this.box);
  }

  /** Shows what belongs to the state. */
  show() {
    const command = this.of.command();
    this.command.textContent = command || "none: a study that nobody has done is in no sheet";
    this.copyCommand.hidden = command === "";
    const chosen = this.figures.value;
    const figures = Array.from(document.querySelectorAll(`#${this.id} figure[id]`)).filter((f) => f.querySelector("svg.chart"));
    this.figures.replaceChildren(...figures.map((f) => make("option", { value: f.id }, `${capitalised(f.id.replace(this.id + "-", "").replace(/-/g, " "))}: ${titleOf(f)}`)));
    if (figures.some((f) => f.id === chosen)) this.figures.value = chosen;
  }

  async json() {
    await whatIf.settled();
    save(new Blob([this.of.json()], { type: "application/json" }), this.id + "-what-if.json");
  }

  /** @param {"svg" | "png"} form */
  async draw(form) {
    await whatIf.settled();
    const figure = byId(this.figures.value);
    if (figure === null) return;
    const charts = chartsOf(figure);
    try {
      for (const [i, chart] of charts.entries()) {
        const image = standalone(chart, [titleOf(figure), ...this.of.notes()]);
        const name = `${figure.id}${charts.length > 1 ? "-" + (i + 1) : ""}.${form}`;
        save(form === "svg" ? new Blob([svgText(image)], { type: "image/svg+xml" }) : await png(image), name);
      }
      this.of.say("The figure is saved.");
    } catch (error) {
      this.of.say("No figure: " + (error instanceof Error ? error.message : String(error)) + ".");
    }
  }

  /** @param {string} text @param {string} what */
  async copy(text, what) {
    this.of.say((await copied(text)) ? `${what} is copied.` : `${what} cannot be copied here.`);
  }
}

/** A figure's title, without its number on the page. @param {Element} figure */
function titleOf(figure) {
  return (figure.querySelector("figcaption b")?.textContent ?? "").replace(/^Figure \d+\. /, "");
}

/** @param {Blob} content @param {string} name */
function save(content, name) {
  const address = URL.createObjectURL(content);
  const link = /** @type {HTMLAnchorElement} */ (make("a", { href: address, download: name }));
  link.click();
  setTimeout(() => URL.revokeObjectURL(address), 10000);
}

/** @param {string} text @returns {Promise<boolean>} whether it is in the clipboard */
async function copied(text) {
  try {
    await navigator.clipboard.writeText(text);
    return true;
  } catch {
    const before = document.activeElement;
    const field = /** @type {HTMLTextAreaElement} */ (make("textarea", { class: "vh", "aria-hidden": "true" }));
    field.value = text;
    document.body.append(field);
    field.select();
    const done = document.execCommand("copy");
    field.remove();
    if (before instanceof HTMLElement) before.focus({ preventScroll: true });
    return done;
  }
}
