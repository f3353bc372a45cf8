// Where light curves come from, and the wall of small ones.

const curveStore = {inside: null, parts: new Map(), waiting: new Map()};

/** Light curve of a row: from the page, or from a script file beside it that is loaded when first needed. */
function curveOf(i) {
  const where = page.lightcurves;
  if (!where) return Promise.resolve(null);
  if (where.inside) {
    if (!curveStore.inside) curveStore.inside = JSON.parse(byId('curve-data').textContent);
    return Promise.resolve(curveStore.inside[i]);
  }
  if (!where.known[i]) return Promise.resolve(null);
  const part = Math.floor(i / where.a_file);
  return curvePart(part).then((curves) => curves[i - part * where.a_file]);
}

function curvePart(part) {
  if (!curveStore.parts.has(part)) {
    curveStore.parts.set(part, new Promise((done, fail) => {
      curveStore.waiting.set(part, done);
      const file = `${page.lightcurves.folder}/part-${part}.js`;
      const script = el('script', {src: file});
      script.nonce = document.querySelector('script[nonce]').nonce;
      script.addEventListener('error', () => {
        curveStore.parts.delete(part);
        fail(new Error(`The light curves are in the file ${decodeURIComponent(file)} beside this page, which could not be read: pass the folder on together with the page.`));
      });
      document.head.append(script);
    }));
  }
  return curveStore.parts.get(part);
}
globalThis.thirdrungLightCurves = (part, curves) => curveStore.waiting.get(part)?.(curves);

const wall = {drawn: 0, seen: null};

function lightcurveSection() {
  wall.seen = new IntersectionObserver((entries) => {
    for (const {target, isIntersecting} of entries) {
      if (!isIntersecting) continue;
      wall.seen.unobserve(target);
      drawTile(target);
    }
  }, {rootMargin: '300px'});
  return section('light-curves', 'Light curves', 'In the order of the list, and only what its search leaves. Each band in its own strip, scaled to its peak, flux upward; the line down marks maximum light, crosses mistrusted epochs.',
    el('div', {id: 'wall', class: 'wall'}), el('div', {class: 'tools'}, el('button', {type: 'button', id: 'wall-more', class: 'quiet', onclick: () => moreTiles(240)}, 'more')));
}

function drawTile(tile) {
  curveOf(Number(tile.dataset.i)).then((curve) => {
    if (!tile.isConnected) return;
    if (!curve) tile.classList.add('empty');
    else drawSmall(tile.querySelector('canvas'), curve);
    tile.dataset.drawn = 'yes';
  }, () => tile.classList.add('empty'));
}

function moreTiles(count) {
  const rows = list.rows.slice(wall.drawn, wall.drawn + count);
  for (const sn of rows) {
    const note = [known(sn.z) ? 'z ' + sn.z.toFixed(3) : '', known(sn.r) ? signed(sn.r, 2) : ''].filter(Boolean).join('  ');
    const tile = el('button', {type: 'button', class: 'tile' + (sn.used ? '' : ' left-out'), 'data-i': sn.i, title: sn.name, onclick: () => openPanel(sn.i),
      onpointerenter: () => selection.look(sn.i), onpointerleave: () => selection.look(-1)},
    el('span', {class: 'tile-name'}, sn.name), el('span', {class: 'tile-note'}, note), el('canvas', {'aria-hidden': 'true'}));
    byId('wall').append(tile);
    wall.seen.observe(tile);
  }
  wall.drawn += rows.length;
  byId('wall-more').hidden = wall.drawn >= list.rows.length;
  byId('wall-more').textContent = `show more (${list.rows.length - wall.drawn} not shown yet)`;
}

function watchWall() {
  const restart = () => {
    byId('wall').replaceChildren();
    wall.drawn = 0;
    moreTiles(400);
  };
  list.listeners.push(restart);
  restart();
}

function redrawWall() {
  for (const tile of document.querySelectorAll('.tile[data-drawn]')) drawTile(tile);
}
