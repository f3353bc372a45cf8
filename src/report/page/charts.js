// Charts: specifications of the program drawn by Vega, in the colours of the theme, when they come into sight.

const charts = [];  // {chart, view, plot, ring, visible, stale, points, tips, bars}

/** The specification with "@name" replaced by the theme's colours; data and domains are left alone. */
function themed(value, key = '') {
  if (key === 'values' || key === 'domain') return value;
  if (typeof value === 'string') {
    if (/^@[a-z]+\d*$/.test(value)) return themeColour(value.slice(1));
    if (key === 'signal' || key === 'update') return value.replace(/'@([a-z]+\d*)'/g, (_, name) => `'${themeColour(name)}'`);
    return value;
  }
  if (Array.isArray(value)) return value.map((item) => themed(item));
  if (value && typeof value === 'object') return Object.fromEntries(Object.entries(value).map(([k, v]) => [k, themed(v, k)]));
  return value;
}

function chartConfig() {
  const ink = themeColour('ink'), muted = themeColour('muted'), rule = themeColour('rule');
  const font = getComputedStyle(document.body).fontFamily;
  return {
    background: themeColour('paper'),
    axis: {labelColor: muted, titleColor: ink, labelFont: font, titleFont: font, labelFontSize: 11, titleFontSize: 12, titleFontWeight: 'normal',
      domain: false, tickColor: rule, gridColor: rule, gridOpacity: 0.55, tickSize: 4, titlePadding: 6},
    legend: {labelColor: muted, titleColor: ink, labelFont: font, titleFont: font, labelFontSize: 11, titleFontSize: 11, titleFontWeight: 'normal', titleLimit: 400},
    text: {font},
  };
}

/** Copies of the supernovae with only the fields that the chart names, since Vega writes into what it is given. */
function rowsFor(spec) {
  const text = JSON.stringify(spec);
  const fields = Object.keys(supernovae[0] || {}).filter((name) => text.includes(`datum.${name}`) || text.includes(`"${name}"`));
  return supernovae.map((row) => {
    const copy = {i: row.i};
    for (const field of fields) copy[field] = row[field];
    return copy;
  });
}

function drawChart(entry) {
  const {chart, plot} = entry;
  if (entry.view) entry.view.finalize();
  plot.querySelector('.vega-holder').replaceChildren();
  const spec = themed(chart.spec);
  const view = new vega.View(vega.parse(spec, chartConfig(), {ast: true}), {
    renderer: page.count > 700 ? 'canvas' : 'svg', container: plot.querySelector('.vega-holder'), expr: vega.expressionInterpreter, hover: false});
  entry.view = view;
  view.width(plot.clientWidth).height(chart.height);
  view.data('sn', rowsFor(spec));
  entry.stale = true;
  refreshChart(entry);
}

function refreshChart(entry) {
  if (!entry.view || !entry.stale) return;
  entry.stale = false;
  const mask = new Array(page.count).fill(false);
  for (const i of selection.marked) mask[i] = true;
  entry.view.signal('picked', selection.marked.size > 0).signal('mask', mask);
  entry.ready = entry.view.runAsync().then(() => { entry.points = null; placeRing(entry); entry.plot.dataset.drawn = 'yes'; });
}

/** Places of the marks on the chart, in pixels of the plot: supernovae, histogram bars, whatever has a text of its own. */
function geometry(entry) {
  if (entry.points) return entry;
  entry.points = [];
  entry.bars = [];
  entry.tips = [];
  const padding = entry.view.padding(), origin = entry.view.origin();
  const visit = (mark, x, y) => {
    for (const item of mark.items) {
      const datum = item.datum || {};
      if (mark.marktype === 'group') for (const inner of item.items) visit(inner, x + (item.x || 0), y + (item.y || 0));
      else if (mark.name === 'points' && known(item.x) && known(item.y)) entry.points.push({i: datum.i, x: x + item.x, y: y + item.y});
      else if (mark.name === 'bars') entry.bars.push({x1: x + item.bounds.x1, x2: x + item.bounds.x2, y1: y + item.bounds.y1, y2: y + item.bounds.y2, b0: datum.b0, b1: datum.b1});
      if (datum.tip && mark.marktype !== 'text') {
        const b = item.bounds;
        entry.tips.push({x1: x + b.x1 - 3, x2: x + b.x2 + 3, y1: y + b.y1 - 3, y2: y + b.y2 + 3, text: datum.tip});
      }
    }
  };
  visit(entry.view.scenegraph().root, origin[0] + (padding.left || 0), origin[1] + (padding.top || 0));
  return entry;
}

/** A ring around the supernova in focus; an element of its own, so that hovering redraws nothing. */
function placeRing(entry) {
  const ring = entry.ring;
  const points = selection.focus >= 0 && entry.view && entry.visible ? geometry(entry).points.filter((p) => p.i === selection.focus) : [];
  ring.replaceChildren(...points.map((p) => el('span', {style: `left:${p.x}px;top:${p.y}px`})));
}

function chartCsv(chart) {
  if (chart.csv.rows) return csvText(chart.csv.header, chart.csv.rows);
  const fields = chart.csv.fields;
  const shown = supernovae.filter((sn) => fields.every((f) => f === 'name' || f.endsWith('e') || sn[f] !== null) && (sn.used || fields.includes('infl')));
  return csvText(fields.map((f) => csvNames[f] || f), shown.map((sn) => fields.map((f) => sn[f])));
}

function chartFigure(chart) {
  const holder = el('div', {class: 'vega-holder', 'aria-hidden': 'true'}), ring = el('div', {class: 'ring'});
  const plot = el('div', {class: 'plot', tabindex: '0', role: 'img', 'aria-label': `${chart.title}. ${chart.caption} Arrow keys step through the supernovae, Enter opens a light curve.`,
    style: `height:${chart.height}px`}, holder, ring, el('div', {class: 'brush', hidden: true}));
  const entry = {chart, plot, ring, view: null, visible: false, stale: true};
  const button = (text, what, act) => el('button', {type: 'button', class: 'quiet', title: `Save ${what}`, 'aria-label': `Save ${chart.title} as ${text}`, onclick: act}, text);
  const figure = el('figure', {id: chart.id, class: 'chart ' + chart.size},
    el('figcaption', {}, el('span', {class: 'chart-title'}, chart.title),
      el('span', {class: 'saves'},
        button('SVG', 'as vector drawing', () => ensureDrawn(entry).then(() => entry.view.toSVG()).then((text) => save(chart.id + '.svg', text, 'image/svg+xml'))),
        button('PNG', 'as picture', () => ensureDrawn(entry).then(() => entry.view.toImageURL('png', 2)).then((url) => save(chart.id + '.png', url))),
        button('CSV', 'its data', () => save(chart.id + '.csv', chartCsv(chart), 'text/csv')))),
    plot, chart.caption ? el('p', {class: 'caption'}, chart.caption) : null);
  entry.figure = figure;
  charts.push(entry);
  followPointer(entry);
  return figure;
}

function ensureDrawn(entry) {
  if (!entry.view) drawChart(entry);
  refreshChart(entry);
  return entry.ready;
}

function watchCharts() {
  const near = new IntersectionObserver((seen) => {
    for (const {target, isIntersecting} of seen) {
      const entry = charts.find((c) => c.plot === target);
      entry.visible = isIntersecting;
      if (isIntersecting) ensureDrawn(entry).then(() => placeRing(entry));
    }
  }, {rootMargin: '500px'});
  const sized = new ResizeObserver((changes) => {
    for (const {target} of changes) {
      const entry = charts.find((c) => c.plot === target);
      if (entry.view && Math.abs(entry.view.width() - target.clientWidth) > 1) {
        entry.points = null;
        entry.view.width(target.clientWidth);
        entry.stale = true;
        if (entry.visible) refreshChart(entry);
      }
    }
  });
  for (const entry of charts) {
    near.observe(entry.plot);
    sized.observe(entry.plot);
  }
  selection.markListeners.push(() => {
    for (const entry of charts) {
      entry.stale = true;
      if (entry.visible) refreshChart(entry);
    }
  });
  selection.focusListeners.push(() => charts.forEach(placeRing));
}

/** After a change of theme. */
function redrawCharts() {
  for (const entry of charts) {
    if (entry.view) drawChart(entry);
  }
}
