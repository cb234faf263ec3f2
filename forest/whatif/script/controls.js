// @ts-check
"use strict";

/** The controls that the program wrote for an outcome: they are read as a variant, and show one. */
class Controls {
  /**
   * @param {HTMLElement} section
   * @param {(at: Element | null) => void} changed called when a reader has changed something, with the control
   */
  constructor(section, changed) {
    this.section = section;
    this.changed = changed;
    this.outcome = section.dataset.name ?? "";
    this.boxes = inputsIn(section, "[data-row]");
    this.columns = /** @type {HTMLElement[]} */ (Array.from(section.querySelectorAll("[data-column]")));
    this.settings = /** @type {(HTMLInputElement | HTMLSelectElement)[]} */ (Array.from(section.querySelectorAll("[data-setting]")));
    this.form = /** @type {HTMLFormElement} */ (section.querySelector("form.wi-added"));
    this.takeAway = /** @type {HTMLButtonElement} */ (section.querySelector("[data-act=take-away]"));
    this.known = this.readKnown();
    /** @type {Record<string, string>} changes of a link that no control offers */
    this.further = {};
    /** @type {Addition | null} */
    this.added = null;
    this.listen();
  }

  /** @returns {Known} */
  readKnown() {
    /** @type {Known} */
    const known = { noun: this.section.dataset.noun ?? "study", nouns: this.section.dataset.nouns ?? "studies", studies: [], planned: {}, labels: {} };
    for (const box of this.boxes) {
      known.studies.push({ row: Number(box.dataset.row), name: box.dataset.studyName ?? "", cells: JSON.parse(box.dataset.cells ?? "{}") });
    }
    for (const e of this.settings) {
      const name = e.dataset.setting ?? "";
      known.planned[name] = e.dataset.planned ?? "";
      known.labels[name] = e.labels?.[0]?.textContent?.toLowerCase() ?? name;
    }
    return known;
  }

  listen() {
    for (const box of this.boxes) box.addEventListener("change", () => this.changed(box));
    for (const column of this.columns) {
      for (const input of inputsIn(column, "input")) {
        input.addEventListener("change", () => {
          if (!this.isNew(input)) return;
          this.byColumn(column, input);
          this.changed(input);
        });
      }
    }
    for (const e of this.settings) e.addEventListener("change", () => this.isNew(e) && this.changed(e));
    for (const e of inputsIn(this.section, "input[type=text]")) e.addEventListener("keydown", (event) => this.typed(e, event));
    this.form.addEventListener("submit", (event) => {
      event.preventDefault();
      if (this.readAdded()) this.changed(this.form);
    });
    this.takeAway.addEventListener("click", () => {
      this.added = null;
      this.changed(this.takeAway);
      inputsIn(this.form, "input")[0].focus();
    });
  }

  /**
   * Enter takes a text over; Escape takes back one that is not yet taken over, or was
   * refused.
   * @param {HTMLInputElement} input
   * @param {KeyboardEvent} event
   */
  typed(input, event) {
    const taken = input.dataset.taken ?? "";
    if (input.value === taken) return;
    if (event.key === "Enter" && input.form === null) input.dispatchEvent(new Event("change"));
    if (event.key !== "Escape") return;
    event.preventDefault();
    input.value = input.dataset.asked = taken;
    this.refuse("");
  }

  /**
   * Whether a text was not asked for already: Enter and leaving the field both tell.
   * @param {HTMLInputElement | HTMLSelectElement} e
   */
  isNew(e) {
    if (e.type !== "text") return true;
    if (e.value === e.dataset.asked) return false;
    e.dataset.asked = e.value;
    return true;
  }

  /**
   * Lets the boxes of the studies follow a choice of a whole group.
   * @param {HTMLElement} column
   * @param {HTMLInputElement} input
   */
  byColumn(column, input) {
    const name = column.dataset.column ?? "";
    if (input.dataset.value !== undefined) {
      const rows = rowsWith(this.known.studies, name, input.dataset.value.trim());
      this.check((row, on) => (rows.includes(row) ? input.checked : on));
      return;
    }
    const [from, to] = ["from", "to"].map((end) => inputsIn(column, `[data-end=${end}]`)[0].value);
    const rows = rowsOutside(this.known.studies, name, from, to);
    this.check((row) => !rows.includes(row));
  }

  /** @param {(row: number, on: boolean) => boolean} of whether a study is in */
  check(of) {
    for (const box of this.boxes) box.checked = of(Number(box.dataset.row), box.checked);
  }

  /**
   * Leaves a study out, or takes it back in; a hypothetical one is taken away.
   * @param {number} row
   */
  toggle(row) {
    if (this.boxes.some((box) => Number(box.dataset.row) === row)) this.check((r, on) => (r === row ? !on : on));
    else this.added = null;
    this.changed(null);
  }

  /** @returns {boolean} whether the form holds a study; else it says what is amiss */
  readAdded() {
    /** @type {Addition} */
    const added = { study: "What-if", numbers: {} };
    for (const input of inputsIn(this.form, "[data-number]")) {
      const value = endOf(input.value, NaN);
      if (Number.isNaN(value)) {
        this.refuse(`${input.labels?.[0]?.textContent}: ${input.value.trim() === "" ? "a number is missing" : "this is no number; write it with a decimal point"}.`, input);
        return false;
      }
      added.numbers[input.dataset.number ?? ""] = value;
    }
    const year = inputsIn(this.form, "[data-added-year]")[0];
    const years = this.known.studies.map((s) => endOf(s.cells.year ?? "", NaN)).filter((x) => !Number.isNaN(x));
    const when = endOf(year.value, years.length > 0 ? Math.max(...years) + 1 : NaN);
    if (!Number.isNaN(when)) added.year = Math.round(when);
    this.added = added;
    return true;
  }

  /** @returns {Variant} */
  read() {
    /** @type {Record<string, string>} */
    const changes = { ...this.further };
    for (const e of this.settings) {
      const value = e.value.trim();
      if (value !== "" && value !== e.dataset.planned && value !== e.dataset.refused) changes[e.dataset.setting ?? ""] = value;
    }
    const out = this.boxes.filter((box) => !box.checked).map((box) => Number(box.dataset.row));
    return tidied({ outcome: this.outcome, changes, left_out: out, added: this.added });
  }

  /**
   * Shows a variant, and how many changes each folded part holds.
   * @param {Variant} v
   */
  show(v) {
    this.refuse("");
    this.further = Object.fromEntries(Object.entries(v.changes).filter(([name]) => !this.settings.some((e) => e.dataset.setting === name)));
    const out = new Set(v.left_out);
    this.check((row) => !out.has(row));
    for (const column of this.columns) this.showColumn(column, out);
    for (const e of this.settings) {
      const value = v.changes[e.dataset.setting ?? ""] ?? "";
      e.value = value === "" && e instanceof HTMLSelectElement ? e.options[0].value : value;
      e.classList.toggle("wi-set", value !== "");
    }
    this.added = v.added;
    this.takeAway.hidden = v.added === null;
    this.form.querySelectorAll("button[type=submit]").forEach((e) => (e.textContent = v.added === null ? "Add it" : "Change it"));
    for (const input of inputsIn(this.form, "[data-number]")) {
      if (v.added !== null) input.value = String(v.added.numbers[input.dataset.number ?? ""] ?? "");
    }
    for (const input of inputsIn(this.section, "input[type=text]")) input.dataset.taken = input.dataset.asked = input.value;
    this.count("studies", out.size);
    this.count("added", v.added === null ? 0 : 1);
    for (const group of ["model", "meaning"]) this.count(group, this.section.querySelectorAll(`[data-group=${group}] .wi-set`).length);
  }

  /** @param {HTMLElement} column @param {Set<number>} out */
  showColumn(column, out) {
    const name = column.dataset.column ?? "";
    for (const input of inputsIn(column, "[data-value]")) {
      const share = shareIn(rowsWith(this.known.studies, name, (input.dataset.value ?? "").trim()), out);
      input.checked = share !== "none";
      input.indeterminate = share === "some";
    }
    const ends = inputsIn(column, "[data-end]");
    if (ends.length === 0) return;
    const outside = new Set(rowsOutside(this.known.studies, name, ends[0].value, ends[1].value));
    if (outside.size !== out.size || [...outside].some((row) => !out.has(row))) for (const end of ends) end.value = "";
  }

  /** @param {string} group @param {number} changes */
  count(group, changes) {
    const place = this.section.querySelector(`[data-group=${group}] .wi-count`);
    if (place !== null) place.textContent = changes === 0 ? "" : `${changes} changed`;
  }

  /**
   * Says why a change cannot be made, beside the control it came from; a blank takes the
   * message away.
   * @param {string} problem
   * @param {Element | null} [at]
   */
  refuse(problem, at = null) {
    for (const old of this.section.querySelectorAll(".wi-problem")) old.remove();
    for (const e of this.section.querySelectorAll("[aria-invalid]")) {
      e.removeAttribute("aria-invalid");
      e.removeAttribute("aria-errormessage");
      e.removeAttribute("data-refused");
    }
    if (problem === "") return;
    const id = this.section.id + "-problem";
    const message = make("p", { class: "wi-problem", id, role: "alert" }, capitalised(problem));
    const field = at !== null && this.section.contains(at) ? at : null;
    const beside = field?.closest(".wi-field, .wi-column, form");
    if (beside) {
      beside.append(message);
      if (!(field instanceof HTMLInputElement || field instanceof HTMLSelectElement)) return;
      field.setAttribute("aria-invalid", "true");
      field.setAttribute("aria-errormessage", id);
      if (field instanceof HTMLInputElement) field.dataset.refused = field.value.trim();
    } else this.section.querySelector(".wi-groups")?.before(message);
  }
}
