/**
 * Shows an outcome's sliders where they start, or where a reader had moved them before
 * the outcome changed, if there still is such a stop.
 * @param {Outcome} outcome
 * @param {Outcome} [before]
 */
function showSliders(outcome, before) {
  const stop = (stops, start, was, at, wasStart, name) => {
    if (!was || at === undefined || at === wasStart) return start;
    const same = stops.findIndex((s) => name(s) === name(was[at]));
    return same < 0 ? start : same;
  };
  if (outcome.priors.length) {
    showPrior(outcome, stop(outcome.priors, outcome.prior, before && before.priors, before && before.priorAt, before && before.prior, (s) => s.prior));
  }
  if (outcome.baselines) {
    showBaseline(outcome, stop(outcome.baselines, outcome.baseline, before && before.baselines, before && before.baselineAt, before && before.baseline, (s) => s.texts.base));
  }
}

/** Binds what is new on the page. */
function bind(root) {
  showLive(root);
  bindStudies(root);
  bindTables(root);
}

/**
 * Takes an outcome's new data, and binds its new elements.
 * @param {Outcome} outcome
 * @param {Element[]} changed
 */
function rebindOutcome(outcome, changed) {
  const before = pageOutcome(outcome.id);
  data.outcomes = data.outcomes.filter((o) => o !== before).concat(outcome);
  changed.forEach(bind);
  showSliders(outcome, before);
}

document.addEventListener('input', (event) => {
  const { control } = event.target.dataset;
  const outcome = control && pageOutcome(event.target.closest('.outcome').id);
  if (control === 'prior') showPrior(outcome, +event.target.value);
  if (control === 'baseline') showBaseline(outcome, +event.target.value);
}, true);

bind(document);
data.outcomes.forEach((outcome) => showSliders(outcome));
