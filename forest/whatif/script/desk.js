// @ts-check
"use strict";

/** How many of the variants looked at are listed on the page, so that it stays quick. */
const mostListed = 50;

/** Everything that changes one outcome: its controls, its banner, and what was looked at. */
class Desk {
  /** @param {HTMLElement} section the controls that the program wrote */
  constructor(section) {
    this.section = section;
    this.id = section.dataset.whatif ?? "";
    this.controls = new Controls(section, (at) => this.go(this.controls.read(), undefined, at));
    this.looks = new Looks(planned(this.controls.outcome));
    this.planned = factsOf(this.id);
    /** @type {Map<string, Facts | null>} the answer of each variant looked at */
    this.answers = new Map();
    /** @type {Reply} */
    this.reply = {};
    /** What was asked for last, how it is taken over, and where the keyboard was. @type {{variant: Variant, take: () => void, spot: Spot | null} | null} */
    this.asked = null;
    this.rows = new Rows(this.id, this.controls.known, (row) => this.controls.toggle(row));
    const acts = { undo: () => this.undo(), redo: () => this.redo(), plan: () => this.plan(), show: (/** @type {Variant} */ v) => this.go(v) };
    this.banner = new Banner(section, this.id, acts);
    this.export = new Export(section, this.id, {
      json: () => JSON.stringify(exported(this.look(this.looks.now), this.planned, this.looks.log.map((v) => this.look(v)), this.reply), null, 2) + "\n",
      link: () => linkTo(desks.map((d) => d.looks.now)),
      command: () => this.reply.command ?? "",
      notes: () => this.notes(),
      say: (text) => this.banner.announce(text),
    });
    this.section.hidden = false;
    this.rows.attach(pageOutcome(this.id).studies, []);
    this.show();
  }

  /** @param {Variant} v @returns {Look} */
  look(v) {
    return { variant: v, words: differencesOf(v, this.controls.known), facts: isPlanned(v) ? this.planned : this.answers.get(JSON.stringify(v)) ?? null };
  }

  /** Lines for a figure of its own. */
  notes() {
    const words = this.look(this.looks.now).words;
    if (words.length === 0) return [];
    const looks = this.looks.log.length;
    return [`What if, not the plan: ${words.join("; ")}. ${looks} ${looks === 1 ? "variant was" : "variants were"} looked at.`];
  }

  /**
   * Shows a variant; taken over only once it has an answer.
   * @param {Variant} v
   * @param {() => void} [take]
   * @param {Element | null} [at] the control that asks for it
   */
  async go(v, take = () => void this.looks.change(v), at = null) {
    current = this;
    this.asked = { variant: v, take, spot: spotNow() };
    this.section.setAttribute("aria-busy", "true");
    let problem = "";
    try {
      const reply = await whatIf.ask(this.id, v);
      if (reply === null) return; // a later change overtook this one
      if (!reply.document) problem = reply.problem ?? "the change cannot be made";
    } catch (error) {
      problem = error instanceof Error ? error.message : String(error);
    }
    this.section.removeAttribute("aria-busy");
    if (problem !== "") this.refuse(problem, at);
  }

  /** @param {string} problem @param {Element | null} at */
  refuse(problem, at) {
    const typed = at === this.controls.form || (at instanceof HTMLInputElement && at.type === "text");
    if (typed) this.controls.added = this.looks.now.added;
    else this.controls.show(this.looks.now);
    this.controls.refuse(problem, at);
  }

  /**
   * An answer has come into the page, asked for here or elsewhere. It comes again when its
   * late sections have.
   * @param {Variant} variant
   * @param {Reply} reply
   */
  shown(variant, reply) {
    const again = reply === this.reply;
    const here = again ? spotNow() : null;
    const mine = this.asked !== null && sameVariant(this.asked.variant, variant) ? this.asked : null;
    if (mine === null) this.looks.change(variant);
    else mine.take();
    this.asked = mine === null ? this.asked : null;
    this.reply = reply;
    this.answers.set(JSON.stringify(this.looks.now), factsOf(this.id));
    this.rows.attach(reply.data?.studies ?? [], this.looks.now.left_out);
    if (again) {
      this.banner.tag(this.look(this.looks.now).words);
      this.export.show();
      return returnTo(here, this.id);
    }
    this.show();
    returnTo(mine?.spot ?? null, this.id);
    this.tell();
  }

  /** Brings controls, banner, export and the page's address to what is shown. */
  show() {
    const look = this.look(this.looks.now);
    this.controls.show(this.looks.now);
    const { log } = this.looks;
    this.banner.show(look, this.planned, log.slice(-mostListed).map((v) => this.look(v)), log.length, { undo: this.can("undo"), redo: this.can("redo") });
    this.export.show();
  }

  tell() {
    const { words, facts } = this.look(this.looks.now);
    this.banner.announce(`${words.length === 0 ? "Back at the plan." : `Not the plan: ${changesText(words.length)}.`} ${inShort(words.length === 0 ? null : this.planned, facts)}`);
    try {
      history.replaceState(null, "", linkTo(desks.map((d) => d.looks.now)));
    } catch {
      // some browsers keep the address of a file as it is; the link can still be copied
    }
  }

  undo() {
    const before = this.looks.past.at(-1);
    if (before !== undefined) this.go(before, () => void this.looks.undo());
  }

  redo() {
    const after = this.looks.future.at(-1);
    if (after !== undefined) this.go(after, () => void this.looks.redo());
  }

  plan() {
    if (this.can("plan")) this.go(planned(this.controls.outcome));
  }

  /** @param {"undo" | "redo" | "plan"} act */
  can(act) {
    if (act === "plan") return !isPlanned(this.looks.now);
    return (act === "undo" ? this.looks.past : this.looks.future).length > 0;
  }

  /** The engine cannot answer: what is shown stays, and what it differs in from the plan is still said. */
  close() {
    this.section.hidden = isPlanned(this.looks.now);
    byId(this.id)?.classList.add("wi-closed");
    this.rows.detach();
    if (this.section.hidden) this.banner.close();
  }
}

/** The outcomes of the page that can be changed. @type {Desk[]} */
let desks = [];

/** The one changed last, for the keys. @type {Desk | null} */
let current = null;

/**
 * The texts of an outcome's answer as it stands on the page; null where there is none.
 * @param {string} id
 * @returns {Facts | null}
 */
function factsOf(id) {
  const place = document.querySelector(`#${id} [data-facts]`);
  return place instanceof HTMLElement ? /** @type {Facts} */ (/** @type {unknown} */ ({ ...place.dataset })) : null;
}

/** The page's address with variants behind it. @param {Variant[]} variants */
function linkTo(variants) {
  const fragment = toFragment(variants);
  const address = location.href.split("#")[0];
  return fragment === "" ? address : `${address}#${fragment}`;
}

/** Opens the controls of every outcome, in the state that the page's address names. */
function openDesks() {
  if (whatIf.broken) return;
  desks = Array.from(document.querySelectorAll("[data-whatif]")).map((section) => new Desk(/** @type {HTMLElement} */ (section)));
  document.addEventListener("whatif:broken", () => desks.forEach((desk) => desk.close()));
  document.addEventListener("whatif:shown", (event) => {
    const { outcomeId, variant, reply } = /** @type {CustomEvent} */ (event).detail;
    if (reply.document) desks.find((desk) => desk.id === outcomeId)?.shown(variant, reply);
  });
  document.addEventListener("keydown", (event) => {
    const act = actOf(event, isTyping(event.target));
    if (act === "" || event.defaultPrevented) return;
    const desk = deskFor(act, event.target);
    if (desk === undefined) return;
    event.preventDefault();
    desk[act]();
  });
  addEventListener("resize", () => desks.forEach((desk) => desk.rows.attachCharts()));
  addEventListener("hashchange", openLink);
  openLink();
}

/** Shows the variants of the page's address. */
function openLink() {
  for (const v of fromFragment(location.hash)) {
    const desk = desks.find((d) => d.controls.outcome === v.outcome);
    if (desk === undefined) desks[0]?.controls.refuse(`the link is for the outcome “${v.outcome}”, which this page does not have`);
    else if (!sameVariant(desk.looks.now, v)) desk.go(v);
  }
}

/**
 * The outcome that a key is for: where it was pressed, else the last changed, else the
 * first in which it means something.
 * @param {"undo" | "redo" | "plan"} act
 * @param {EventTarget | null} target
 */
function deskFor(act, target) {
  const id = target instanceof Element ? target.closest(".outcome")?.id : undefined;
  return [...desks.filter((d) => d.id === id), ...desks.filter((d) => d === current), ...desks].find((d) => d.can(act));
}
