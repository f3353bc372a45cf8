// One supernova, large: its light curve band by band, and its fit in words.

const panel = {row: -1, magnitudes: false, curve: null};

function fitInWords(sn) {
  const sentences = [];
  const bands = (sn.bands || '').split(',').filter(Boolean);
  let seen = `Seen by ${sn.survey_name || 'an unnamed survey'}`;
  if (bands.length) seen += ` in ${listed(bands)}`;
  if (known(sn.p0) && known(sn.p1)) {
    const when = (p) => Math.abs(p) < 0.5 ? 'maximum' : `${Math.abs(p).toFixed(0)} days ${p < 0 ? 'before' : 'after'} maximum`;
    seen += `, from ${when(sn.p0)} to ${when(sn.p1)}`;
  }
  sentences.push(seen + '.');
  if (known(sn.t0)) sentences.push(`Maximum light in B on MJD ${withError(sn.t0, sn.t0e)} at m_B = ${withError(sn.m, sn.me)} mag.`);
  if (known(sn.s)) {
    const pace = Math.abs(sn.s - 1) < Math.max(0.02, sn.se) ? 'as fast as the fiducial supernova' : sn.s > 1 ? 'slower than the fiducial supernova' : 'faster than the fiducial supernova';
    sentences.push(`Stretch s = ${withError(sn.s, sn.se)}: ${pace}.`);
  }
  if (known(sn.c)) {
    const tint = Math.abs(sn.c) < Math.max(0.01, sn.ce) ? 'neither redder nor bluer than it' : sn.c > 0 ? 'redder' : 'bluer';
    sentences.push(`Colour c = ${withError(sn.c, sn.ce, true)} mag: ${tint}.`);
  }
  if (known(sn.chi2)) sentences.push(`χ² = ${fixed(sn.chi2, 1)} for ${plural(sn.dof, 'degree', 'degrees')} of freedom${known(sn.prob) ? `, probability ${sn.prob < 0.001 ? sn.prob.toExponential(0).replace('-', '−') : fixed(sn.prob, 3)}` : ''}.`);
  if (sn.bad) sentences.push(`${plural(sn.bad, 'epoch is', 'epochs are')} mistrusted (crosses).`);
  if (sn.leftout) sentences.push(`Bands left out: ${sn.leftout}.`);
  if (known(sn.mass)) sentences.push(`Host: log₁₀ mass ${withError(sn.mass, sn.masse)}.`);
  if (known(sn.r)) sentences.push(`Standardised magnitude ${withError(sn.m0, sn.m0e)} mag at z = ${sn.z.toFixed(4)}, ${fixed(Math.abs(sn.r), 2)} mag ${sn.r > 0 ? 'fainter' : 'brighter'} than the relation (${fixed(Math.abs(sn.r / sn.re), 1)} σ).`);
  if (sn.cuts) sentences.push(`Left out of the answer by: ${sn.cuts}.`);
  if (sn.remarks) sentences.push(`Remarks: ${sn.remarks}.`);
  return sentences.join(' ');
}

/** What next and previous mean: the order of the list as it stands. */
function neighbour(step) {
  const order = list.rows.some((sn) => sn.i === panel.row) ? list.rows : supernovae;
  const at = order.findIndex((sn) => sn.i === panel.row);
  return order[(at + step + order.length) % order.length].i;
}

function openPanel(i) {
  const sn = supernovae[i], dialog = byId('panel');
  panel.row = i;
  panel.curve = null;
  hideTip();
  const plot = el('div', {id: 'panel-plot', class: 'panel-plot'}, el('p', {class: 'muted'}, page.lightcurves ? 'reading the light curve …' : 'This run left no light curves.'));
  const quiet = (text, act, extra = {}) => el('button', {type: 'button', class: 'quiet', onclick: act, ...extra}, text);
  dialog.replaceChildren(
    el('header', {},
      el('h2', {id: 'panel-name', title: sn.name}, sn.name),
      el('div', {class: 'panel-tools'},
        quiet('‹ previous', () => openPanel(neighbour(-1))), quiet('next ›', () => openPanel(neighbour(1))),
        quiet(panel.magnitudes ? 'show flux' : 'show magnitudes', () => { panel.magnitudes = !panel.magnitudes; openPanel(i); }, {id: 'panel-scale'}),
        quiet('SVG', () => panel.curve && save(fileName(sn) + '.svg', panelSvg(), 'image/svg+xml')),
        quiet('PNG', savePanelPng), quiet('CSV', () => panel.curve && save(fileName(sn) + '.csv', panelCsv(), 'text/csv')),
        quiet('close', () => dialog.close(), {id: 'panel-close'}))),
    el('p', {class: 'words'}, fitInWords(sn)), plot);
  if (!dialog.open) dialog.showModal();
  dialog.dataset.row = i;
  curveOf(i).then((curve) => {
    if (panel.row !== i) return;
    panel.curve = curve;
    plot.replaceChildren(curve && curve.b.some((b) => b.p.length || b.cf.length) ? drawLarge(curve, panel.magnitudes, sn.name) : el('p', {class: 'muted'}, 'No light curve of this supernova in the run.'));
  }, (fault) => { if (panel.row === i) plot.replaceChildren(el('p', {class: 'warning'}, fault.message)); });
}

const fileName = (sn) => sn.name.replace(/[^\p{L}\p{N}._-]+/gu, '_').slice(0, 60) || 'supernova';
const panelSvg = () => new XMLSerializer().serializeToString(drawLarge(panel.curve, panel.magnitudes, supernovae[panel.row].name));

function savePanelPng() {
  if (!panel.curve) return;
  const drawing = drawLarge(panel.curve, panel.magnitudes, supernovae[panel.row].name);
  pngOfSvg(panelSvg(), Number(drawing.getAttribute('width')), Number(drawing.getAttribute('height')), themeColour('paper')).then((blob) => save(fileName(supernovae[panel.row]) + '.png', blob, 'image/png'));
}

function panelCsv() {
  const rows = panel.curve.b.flatMap((b) => {
    const bad = new Set(b.x);
    return b.p.map((p, n) => [b.n, b.t[n], p, b.f[n], b.e[n], b.m[n], b.u[n], bad.has(n) ? 'true' : 'false']);
  });
  return csvText(['passband', 'mjd', 'phase', 'flux_uJy', 'flux_error_uJy', 'model_flux_uJy', 'pull', 'mistrusted'], rows);
}

byId('panel').addEventListener('keydown', (event) => {
  const step = {ArrowRight: 1, ArrowLeft: -1}[event.key];
  if (!step) return;
  event.preventDefault();
  openPanel(neighbour(step));
});
byId('panel').addEventListener('click', (event) => { if (event.target === byId('panel')) byId('panel').close(); });
