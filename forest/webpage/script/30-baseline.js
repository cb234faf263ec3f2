/** Moves an outcome's slider of baseline risks, with all that follows from it, to a stop. */
function showBaseline(outcome, stop) {
  outcome.baselineAt = stop;
  const root = document.getElementById(outcome.id);
  const q = outcome.baselines[stop];
  all('input[data-control=baseline]', root).forEach((e) => {
    e.value = stop;
    e.setAttribute('aria-valuetext', `${q.texts.base} per 1000`);
  });
  Object.keys(q.texts).forEach((slot) => put(root, slot, q.texts[slot]));
  all('[data-bar]', root).forEach((bar) => {
    const [from, to] = bar.dataset.bar.split(' ').map((name) => q.bars[name]);
    bar.style.left = to === undefined ? '0' : `${from}%`;
    bar.style.width = `${to === undefined ? from : to - from}%`;
  });
}
