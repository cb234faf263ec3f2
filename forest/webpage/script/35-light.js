/** Elements of each study, by its mark: its row in the table and its rows in charts. */
const studies = new Map();

/** Whether rows of charts that are shown may not be bound yet. */
let chartsWait = true;

const NS = 'http://www.w3.org/2000/svg';

/** Adds or takes away a class of all elements of a study. */
function markStudy(study, name, on) {
  bindCharts();
  (studies.get(study) || []).forEach((e) => e.classList.toggle(name, on));
}

/** Binds an element to a study: to point at it lights all others. */
function bindStudy(study, element) {
  if (!studies.has(study)) studies.set(study, []);
  studies.get(study).push(element);
  element.addEventListener('pointerenter', () => markStudy(study, 'on', true));
  element.addEventListener('pointerleave', () => markStudy(study, 'on', false));
}

/** Binds the row of a chart, under a strip across the chart that can be pointed at. */
function bindRow(study, group) {
  const svg = group.ownerSVGElement;
  const box = group.getBBox();
  const strip = document.createElementNS(NS, 'rect');
  strip.setAttribute('class', 'hit');
  strip.setAttribute('x', 0);
  strip.setAttribute('y', box.y - 2);
  strip.setAttribute('width', svg.viewBox.baseVal.width);
  strip.setAttribute('height', box.height + 4);
  strip.setAttribute('fill', 'none');
  group.prepend(strip);
  bindStudy(study, group);
}

/** Binds the rows of the charts that are shown; hidden ones have no box yet. */
function bindCharts() {
  if (!chartsWait) return;
  chartsWait = false;
  data.outcomes.forEach((outcome) => Object.keys(outcome.rows).forEach((chart) => {
    const figure = document.getElementById(`${outcome.id}-${chart}`);
    all('g[id*="-row-"]', figure || document.createElement('p')).forEach((group) => {
      const study = outcome.rows[chart][group.id.split('-row-')[1] - 1];
      if (study && !group.dataset.bound && group.getBoundingClientRect().height > 0) {
        group.dataset.bound = 'yes';
        bindRow(study, group);
      }
    });
  }));
}

/** Binds what shows studies within a root. Rows of charts wait until they are needed. */
function bindStudies(root) {
  studies.forEach((elements, study) => studies.set(study, elements.filter((e) => e.isConnected)));
  all('[data-study]', root).forEach((row) => bindStudy(row.dataset.study, row));
  chartsWait = true;
}

document.addEventListener('pointerover', (event) => { if (chartsWait && event.target.closest('figure')) bindCharts(); });
addEventListener('resize', () => { chartsWait = true; });
