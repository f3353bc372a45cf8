// The list of supernovae: searched, narrowed, sorted; the light curves below follow it.

const listColumns = [
  {key: 'name', title: 'supernova', text: (sn) => sn.name},
  {key: 'survey_name', title: 'survey', text: (sn) => sn.survey_name},
  {key: 'flags', title: 'flags, why left out', text: flagText},
  {key: 'z', title: 'z', text: (sn) => fixed(sn.z, 4), number: true},
  {key: 'm', title: 'm_B (mag)', text: (sn) => withError(sn.m, sn.me), number: true},
  {key: 's', title: 's', text: (sn) => withError(sn.s, sn.se), number: true},
  {key: 'c', title: 'c (mag)', text: (sn) => withError(sn.c, sn.ce, true), number: true},
  {key: 'mass', title: 'host log M', text: (sn) => withError(sn.mass, sn.masse), number: true},
  {key: 'chir', title: 'χ²/dof', text: (sn) => fixed(sn.chir, 2), number: true},
  {key: 'p0', title: 'first (d)', text: (sn) => signed(sn.p0, 1), number: true},
  {key: 'm0', title: 'standard m_B', text: (sn) => withError(sn.m0, sn.m0e), number: true},
  {key: 'r', title: 'residual (mag)', text: (sn) => withError(sn.r, sn.re, true), number: true},
  {key: 'infl', title: '10³ Δa_B', text: (sn) => known(sn.infl) ? signed(1000 * sn.infl, 2) : '–', number: true},
];

function flagText(sn) {
  const flags = [];
  if (sn.cuts) flags.push('left out: ' + sn.cuts);
  if (sn.chauvenet) flags.push('residual mistrusted');
  if (!sn.trusted) flags.push('fit not trusted');
  if (sn.remarks) flags.push(sn.remarks);
  return flags.join('; ');
}

const list = {
  sortKey: '', ascending: true, words: '', show: 'all', rows: [], drawn: 0, listeners: [],

  /** Rows that search, choice and sorting leave, in order. */
  choose() {
    const words = this.words.toLocaleLowerCase().split(/\s+/).filter(Boolean);
    const keep = {all: () => true, used: (sn) => sn.used, out: (sn) => !sn.used, flagged: (sn) => flagText(sn) !== '', marked: (sn) => selection.marked.has(sn.i)}[this.show];
    this.rows = supernovae.filter((sn) => {
      if (!keep(sn)) return false;
      const text = `${sn.name} ${sn.survey_name} ${flagText(sn)} ${sn.bands}`.toLocaleLowerCase();
      return words.every((word) => text.includes(word));
    });
    if (this.sortKey) {
      const value = this.sortKey === 'flags' ? flagText : (sn) => sn[this.sortKey];
      const absent = (v) => v === null || v === undefined || v === '';
      this.rows.sort((a, b) => {
        const x = value(a), y = value(b);
        if (absent(x) || absent(y)) return absent(x) - absent(y);  // What is not known stands last either way.
        const order = typeof x === 'string' ? x.localeCompare(y) : x - y;
        return this.ascending ? order : -order;
      });
    }
  },

  update() {
    this.choose();
    this.drawn = 0;
    byId('list-body').replaceChildren();
    this.more();
    byId('list-scroll').scrollTop = 0;
    byId('list-count').textContent = `${this.rows.length} of ${plural(supernovae.length, 'supernova', 'supernovae')}`;
    for (const head of document.querySelectorAll('#list th')) {
      const mine = head.dataset.key === this.sortKey;
      head.setAttribute('aria-sort', mine ? (this.ascending ? 'ascending' : 'descending') : 'none');
    }
    for (const tell of this.listeners) tell();
  },

  /** Adds the next rows; a list of thousands is drawn as it is scrolled. */
  more() {
    const body = byId('list-body');
    for (const sn of this.rows.slice(this.drawn, this.drawn + 150)) body.append(this.row(sn));
    this.drawn = Math.min(this.rows.length, this.drawn + 150);
  },

  row(sn) {
    const cells = listColumns.filter((column) => this.present.has(column.key)).map((column) => {
      const text = column.text(sn);
      if (column.key === 'name') {
        return el('th', {scope: 'row'}, el('button', {type: 'button', class: 'name', title: sn.name, onclick: () => openPanel(sn.i)}, text));
      }
      return el('td', {class: column.number ? 'number' : column.key, title: column.key === 'flags' ? text : null}, text);
    });
    return el('tr', {class: (sn.used ? '' : 'left-out') + (selection.marked.has(sn.i) ? ' is-marked' : ''), 'data-i': sn.i,
      onpointerenter: () => selection.look(sn.i), onpointerleave: () => selection.look(-1)}, ...cells);
  },
};

function listSection() {
  const has = (key) => supernovae.some((sn) => sn[key] !== null && sn[key] !== undefined && sn[key] !== '');
  list.present = new Set(listColumns.map((c) => c.key).filter((key) => key === 'flags' || has(key)));
  const choice = (value, text) => el('label', {}, el('input', {type: 'radio', name: 'show', value, checked: value === 'all', onchange: () => { list.show = value; list.update(); }}), text);
  const heads = listColumns.filter((c) => list.present.has(c.key)).map((column) => el('th', {scope: 'col', 'data-key': column.key, class: column.number ? 'number' : ''},
    el('button', {type: 'button', onclick: () => {
      list.ascending = list.sortKey === column.key ? !list.ascending : true;
      list.sortKey = column.key;
      list.update();
    }}, column.title)));
  const scroll = el('div', {id: 'list-scroll', class: 'list-scroll', tabindex: '0', role: 'region', 'aria-label': 'List of supernovae',
    onscroll: (event) => { if (event.target.scrollTop + event.target.clientHeight > event.target.scrollHeight - 600) list.more(); }},
  el('table', {id: 'list'}, el('thead', {}, el('tr', {}, heads)), el('tbody', {id: 'list-body'})));
  return section('list-of-supernovae', 'List of supernovae', 'Names open the light curve; headings sort. Search looks at names, surveys, bands and flags.',
    el('div', {class: 'tools'},
      el('label', {for: 'search'}, 'search'), el('input', {type: 'search', id: 'search', oninput: (event) => { list.words = event.target.value; list.update(); }}),
      el('span', {class: 'choices', role: 'radiogroup', 'aria-label': 'Show'}, choice('all', 'all'), choice('used', 'used'), choice('out', 'left out'), choice('flagged', 'flagged'), choice('marked', 'marked')),
      el('span', {id: 'list-count', class: 'count', 'aria-live': 'polite'}),
      el('button', {type: 'button', class: 'quiet', onclick: () => save('supernovae.csv', wholeCsv(list.rows), 'text/csv')}, 'CSV')),
    scroll);
}

/** Everything the page knows of these supernovae. */
function wholeCsv(rows) {
  const fields = ['name', 'survey_name', ...Object.keys(page.supernovae).filter((k) => !['name', 'survey', 'mx', 'my'].includes(k))];
  return csvText(fields.map((f) => csvNames[f] || f), rows.map((sn) => fields.map((f) => typeof sn[f] === 'boolean' ? (sn[f] ? 'true' : 'false') : sn[f])));
}

function watchList() {
  list.update();
  selection.markListeners.push(() => {
    if (list.show === 'marked') return list.update();
    for (const row of document.querySelectorAll('#list-body tr')) row.classList.toggle('is-marked', selection.marked.has(Number(row.dataset.i)));
  });
  selection.focusListeners.push(() => {
    for (const row of document.querySelectorAll('#list-body tr.in-focus')) row.classList.remove('in-focus');
    const row = selection.focus >= 0 && document.querySelector(`#list-body tr[data-i="${selection.focus}"]`);
    if (row) row.classList.add('in-focus');
  });
}
