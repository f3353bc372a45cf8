// The data of the page and the one selection that all charts, the list and the light curves share.

const page = JSON.parse(byId('page-data').textContent);

/** One object a supernova, from the columns; `i` is its row. */
const supernovae = (() => {
  const names = Object.keys(page.supernovae);
  const rows = [];
  for (let i = 0; i < page.count; ++i) {
    const row = {i};
    for (const name of names) row[name] = page.supernovae[name][i];
    row.survey_name = page.surveys[row.survey];
    rows.push(row);
  }
  return rows;
})();

const selection = {
  marked: new Set(),   // Rows marked by a brush.
  focus: -1,           // Row under the pointer, or chosen by keyboard.
  markListeners: [],
  focusListeners: [],

  mark(rows, add = false) {
    if (!add) this.marked.clear();
    for (const i of rows) this.marked.add(i);
    for (const tell of this.markListeners) tell();
    announce(this.marked.size ? plural(this.marked.size, 'supernova', 'supernovae') + ' marked' : 'nothing marked');
  },
  look(i) {
    if (i === this.focus) return;
    this.focus = i;
    for (const tell of this.focusListeners) tell();
  },
};

const csvNames = {z: 'z_flow', ze: 'z_flow_error', vpec: 'v_pec', mass: 'host_log_mass', masse: 'host_log_mass_error',
  m: 'm_b', me: 'm_b_error', se: 's_error', ce: 'c_error', m0: 'm_b_standardised', m0e: 'm_b_standardised_error', r: 'residual', re: 'residual_error',
  rs: 'residual_without_alpha', rc: 'residual_without_beta', rm: 'residual_without_gamma', chir: 'chi2_per_dof', prob: 'fit_probability', p0: 'first_phase',
  p1: 'last_phase', infl: 'delta_ab', infle: 'delta_ab_error', w: 'weight', survey_name: 'survey', name: 'supernova', cut: 'removed_by', cuts: 'removed_by_all',
  bad: 'mistrusted_epochs', t0: 't_0', t0e: 't_0_error', ebv: 'mw_ebv'};

/** What the hover says of a supernova. */
function supernovaTip(i) {
  const sn = supernovae[i];
  const lines = [sn.name, [sn.survey_name, known(sn.z) ? `z ${sn.z.toFixed(4)}` : ''].filter(Boolean).join('   ')];
  if (known(sn.m0)) lines.push(`standardised m_B  ${withError(sn.m0, sn.m0e)} mag`);
  if (known(sn.r)) lines.push(`residual  ${withError(sn.r, sn.re, true)} mag`);
  if (known(sn.s)) lines.push(`s  ${withError(sn.s, sn.se)}    c  ${withError(sn.c, sn.ce, true)}`);
  if (known(sn.mass)) lines.push(`host log M  ${withError(sn.mass, sn.masse)}`);
  if (sn.cut) lines.push(`left out: ${sn.cut}`);
  return lines;
}

function showTip(lines, x, y) {
  const tip = byId('tip');
  tip.replaceChildren(...lines.filter(Boolean).map((line, k) => el('div', {class: k === 0 ? 'tip-name' : ''}, line)));
  tip.hidden = false;
  const box = tip.getBoundingClientRect();
  tip.style.left = Math.max(4, Math.min(x + 14, innerWidth - box.width - 8)) + 'px';
  tip.style.top = (y + 18 + box.height > innerHeight ? Math.max(4, y - box.height - 12) : y + 18) + 'px';
}
function hideTip() { byId('tip').hidden = true; }
