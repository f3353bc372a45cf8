// Puts the page together: the answer, what was run, the charts, the list, the light curves.

function section(id, title, lead, ...content) {
  return el('section', {id, 'aria-labelledby': id + '-title'}, el('h2', {id: id + '-title'}, title), lead ? el('p', {class: 'lead'}, lead) : null, ...content);
}

function answerSection() {
  const a = page.answer;
  const error = (value, word) => value ? [el('span', {class: 'pm'}, ' ± '), el('span', {class: 'error'}, value), el('small', {}, ' ' + word)] : [];
  const line = a.known ? el('p', {class: 'answer', id: 'answer'}, el('i', {}, 'a'), el('sub', {}, 'B'), ' = ', el('span', {id: 'answer-value'}, a.value),
    ...(a.stat || a.sys ? [error(a.stat, 'stat'), error(a.sys, 'sys')] : [error(a.total, '')]), a.blind ? el('span', {class: 'blind'}, 'blind') : null)
    : el('p', {class: 'answer', id: 'answer'}, 'No intercept in this run');
  const facts = a.facts.map(([label, value]) => el('div', {}, el('dt', {}, label), el('dd', {}, value)));
  if (a.total && (a.stat || a.sys)) facts.unshift(el('div', {}, el('dt', {}, 'whole error'), el('dd', {}, a.total)));
  if (a.h0) facts.unshift(el('div', {}, el('dt', {}, 'H₀ (km/s/Mpc)'), el('dd', {}, a.h0)));
  return el('header', {id: 'top', class: 'top'},
    el('div', {class: 'title-line'}, el('h1', {}, page.title), el('button', {type: 'button', class: 'quiet', id: 'theme', onclick: changeTheme}, '')),
    line, el('dl', {class: 'facts', id: 'facts'}, facts),
    a.qualifications.length ? el('p', {class: 'qualification', id: 'qualification'}, a.qualifications.join(' ')) : null,
    a.warnings.length ? el('ul', {class: 'warnings', id: 'warnings'}, a.warnings.map((w) => el('li', {class: 'warning'}, w))) : null);
}

function runSection() {
  const {cuts, inputs, version, files} = page.run;
  if (!cuts.length && !inputs.length && !version) return null;
  const most = Math.max(1, ...cuts.map((c) => Math.max(c[1], c[2])));
  const bar = (value, kind) => el('span', {class: 'mini ' + kind, style: `width:${(100 * value / most).toFixed(1)}%`});
  const table = cuts.length ? el('table', {class: 'cuts', id: 'cuts'},
    el('thead', {}, el('tr', {}, ['rule, in order', 'alone', 'removed', '', 'left'].map((t, k) => el('th', {scope: 'col', class: k && k !== 3 ? 'number' : ''}, t)))),
    el('tbody', {}, cuts.map(([rule, alone, removed, left]) => el('tr', {}, el('th', {scope: 'row'}, rule), el('td', {class: 'number'}, String(alone)), el('td', {class: 'number'}, String(removed)),
      el('td', {class: 'bar-cell', 'aria-hidden': 'true'}, bar(alone, 'alone'), bar(removed, 'removed')), el('td', {class: 'number'}, String(left)))))) : null;
  const record = inputs.length ? el('table', {class: 'inputs'}, el('thead', {}, el('tr', {}, el('th', {scope: 'col'}, 'input'), el('th', {scope: 'col'}, 'SHA-256'))),
    el('tbody', {}, inputs.map(([file, sha]) => el('tr', {}, el('th', {scope: 'row'}, file), el('td', {class: 'sha', title: sha}, sha.slice(0, 16) + (sha.length > 16 ? '…' : '')))))) : null;
  return section('what-was-run', 'What was run', null, el('div', {class: 'two'},
    el('div', {}, table, table ? el('p', {class: 'caption'}, 'Alone: what the rule would remove as the only one (pale bar). Removed: what it took of those left by the rules above.') : null),
    el('div', {}, record, version ? el('p', {class: 'caption'}, version + (files.length ? `. Tables beside this page: ${files.join(', ')}.` : '')) : null)));
}

function surveyKey() {
  if (page.surveys.length < 2) return null;
  const shapes = ['M0-4.5a4.5 4.5 0 1 0 .01 0Z', 'M-4-4h8v8h-8Z', 'M0-5l5 9h-10Z', 'M0-5.5l5 5.5l-5 5.5l-5-5.5Z', 'M-1.6-5h3.2v3.4h3.4v3.2h-3.4v3.4h-3.2v-3.4h-3.4v-3.2h3.4Z', 'M0 5l5-9h-10Z', 'M5 0l-9 5v-10Z', 'M-5 0l9 5v-10Z'];
  const counts = page.surveys.map((_, k) => supernovae.filter((sn) => sn.survey === k && sn.used).length);
  return el('p', {class: 'key', id: 'survey-key', 'aria-label': 'Surveys'}, page.surveys.map((name, k) => el('button', {type: 'button', class: 'key-item', title: 'Mark this survey everywhere',
    onclick: () => selection.mark(supernovae.filter((sn) => sn.survey === k).map((sn) => sn.i))},
  el('svg', {width: 13, height: 13, viewBox: '-6.5 -6.5 13 13', 'aria-hidden': 'true'}, el('path', {d: shapes[k < 8 ? k : 0], class: k < 8 ? 'fill-c' + k : 'fill-other'})), name || 'unnamed', el('small', {}, String(counts[k])))));
}

const themeNames = ['auto', 'light', 'dark'];
function showTheme() {
  const theme = document.documentElement.dataset.theme || 'auto';
  byId('theme').textContent = {auto: 'colours: as the system', light: 'colours: light', dark: 'colours: dark'}[theme];
}
function changeTheme() {
  const now = themeNames.indexOf(document.documentElement.dataset.theme || 'auto');
  document.documentElement.dataset.theme = themeNames[(now + 1) % 3];
  afterTheme();
}
function afterTheme() {
  showTheme();
  redrawCharts();
  redrawWall();
  if (byId('panel').open) openPanel(panel.row);
}

function markedBar() {
  const bar = byId('marked'), count = selection.marked.size;
  bar.hidden = count === 0;
  const residuals = supernovae.filter((sn) => selection.marked.has(sn.i) && sn.used && known(sn.r) && sn.re > 0);
  const sum = residuals.reduce((t, sn) => t + 1 / sn.re ** 2, 0);
  const mean = residuals.reduce((t, sn) => t + sn.r / sn.re ** 2, 0) / sum;
  bar.replaceChildren(el('span', {id: 'marked-count'}, plural(count, 'supernova', 'supernovae') + ' marked'),
    residuals.length > 1 ? el('span', {class: 'muted'}, `weighted mean residual ${withError(mean, 1 / Math.sqrt(sum), true)} mag`) : '',
    el('button', {type: 'button', class: 'quiet', onclick: () => { document.querySelector('input[name=show][value=marked]').click(); byId('list-of-supernovae').scrollIntoView(); }}, 'show in the list'),
    el('button', {type: 'button', class: 'quiet', id: 'unmark', onclick: () => selection.mark([])}, 'clear (Esc)'));
}

function build() {
  const main = byId('main');
  main.append(answerSection());
  const parts = [runSection(), ...page.sections.map((s) => section(s.id, s.title, s.lead, el('div', {class: 'charts'}, s.charts.map(chartFigure)))),
    supernovae.length ? listSection() : null, page.lightcurves ? lightcurveSection() : null].filter(Boolean);
  const key = surveyKey();
  let keyed = false;
  for (const part of parts) {
    if (key && !keyed && part.querySelector('.plot')) {
      part.querySelector('.charts').before(key);
      keyed = true;
    }
    main.append(part);
  }
  byId('rail').append(el('a', {href: '#top', class: 'rail-top'}, 'The answer'), ...parts.map((part) => el('a', {href: '#' + part.id}, part.querySelector('h2').textContent)));
  const here = new IntersectionObserver((seen) => {
    for (const {target, isIntersecting} of seen) document.querySelector(`#rail a[href="#${target.id}"]`).classList.toggle('here', isIntersecting);
  }, {rootMargin: '-30% 0px -60% 0px'});
  [byId('top'), ...parts].forEach((part) => here.observe(part));
}

build();
showTheme();
watchCharts();
if (supernovae.length) watchList();
if (page.lightcurves && supernovae.length) watchWall();
selection.markListeners.push(markedBar);
matchMedia('(prefers-color-scheme: dark)').addEventListener('change', () => { if ((document.documentElement.dataset.theme || 'auto') === 'auto') afterTheme(); });
document.addEventListener('keydown', (event) => {
  if (event.key === 'Escape' && !byId('panel').open && selection.marked.size) selection.mark([]);
  if (event.key === '/' && !/input|textarea/i.test(event.target.tagName) && byId('search')) {
    event.preventDefault();
    byId('search').focus();
  }
});
