/** Moves an outcome's sliders of beliefs, the beam and the texts to a stop. */
function showPrior(outcome, stop) {
  outcome.priorAt = stop;
  const root = document.getElementById(outcome.id);
  const q = outcome.priors[stop];
  all('input[data-control=prior]', root).forEach((e) => {
    e.value = stop;
    e.setAttribute('aria-valuetext', `${q.prior} before, ${q.posterior} after`);
  });
  put(root, 'prior', q.prior);
  put(root, 'posterior', q.posterior);
  all('.beam .slide', root).forEach((slide) => { slide.style.left = `${-q.shift / outcome.span * 100}%`; });
  all('.beam .bp', root).forEach((mark) => {
    const x = (mark.dataset.at - q.shift - outcome.from) / outcome.span;
    mark.classList.toggle('off', x < 0.025 || x > 0.975);
  });
}
