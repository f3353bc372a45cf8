// Light curves drawn by the page itself: hundreds of small ones on canvas, a large one as SVG.

const bandColour = (k) => themeColour('c' + (k % 8));

/** Phase of each point of a band's curve. */
function curvePhases(band) {
  if (band.cp.length !== 2 || band.cf.length < 2) return band.cp;
  return band.cf.map((_, k) => band.cp[0] + k * band.cp[1]);
}
const largest = (values) => values.reduce((best, v) => known(v) && v > best ? v : best, 0);
const bandScale = (band) => largest(band.cf) || largest(band.f) || 1;

/** Small light curve: every band in its own strip, scaled to its peak. */
function drawSmall(canvas, curve) {
  const ratio = Math.min(2, devicePixelRatio || 1), width = canvas.clientWidth || 180, height = canvas.clientHeight || 110;
  canvas.width = width * ratio;
  canvas.height = height * ratio;
  const pen = canvas.getContext('2d');
  pen.scale(ratio, ratio);
  const bands = curve.b;
  const phases = bands.flatMap((b) => [...b.p, ...curvePhases(b)]).filter(known);
  if (!phases.length) return;
  const low = Math.min(...phases, -10), high = Math.max(...phases, 30);
  const x = (p) => 5 + (width - 10) * (p - low) / (high - low);
  const strip = (height - 12) / (1 + 0.62 * (bands.length - 1));
  pen.strokeStyle = themeColour('rule');
  pen.beginPath();
  pen.moveTo(x(0), 2);
  pen.lineTo(x(0), height - 2);
  pen.stroke();
  bands.forEach((band, k) => {
    const peak = bandScale(band), base = height - 6 - 0.62 * strip * k;
    const y = (f) => base - strip * 0.9 * Math.max(-0.3, Math.min(1.25, f / peak));
    const colour = bandColour(k);
    pen.strokeStyle = pen.fillStyle = colour;
    pen.lineWidth = 1.2;
    pen.globalAlpha = 0.9;
    pen.beginPath();
    curvePhases(band).forEach((p, n) => { if (known(band.cf[n])) pen.lineTo(x(p), y(band.cf[n])); });
    pen.stroke();
    const bad = new Set(band.x);
    band.p.forEach((p, n) => {
      if (!known(p) || !known(band.f[n])) return;
      pen.globalAlpha = 0.55;
      pen.lineWidth = 0.8;
      pen.beginPath();
      pen.moveTo(x(p), y(band.f[n] - band.e[n]));
      pen.lineTo(x(p), y(band.f[n] + band.e[n]));
      pen.stroke();
      pen.globalAlpha = 1;
      if (bad.has(n)) {
        pen.beginPath();
        pen.moveTo(x(p) - 2.5, y(band.f[n]) - 2.5);
        pen.lineTo(x(p) + 2.5, y(band.f[n]) + 2.5);
        pen.moveTo(x(p) - 2.5, y(band.f[n]) + 2.5);
        pen.lineTo(x(p) + 2.5, y(band.f[n]) - 2.5);
        pen.stroke();
      } else {
        pen.beginPath();
        pen.arc(x(p), y(band.f[n]), 1.5, 0, 7);
        pen.fill();
      }
    });
  });
  pen.globalAlpha = 1;
}

const abMag = (flux) => 23.9 - 2.5 * Math.log10(flux);

/** Points of a band in flux or magnitude: {p, y, low, high, bad, limit, pull}. */
function bandPoints(band, magnitudes) {
  const bad = new Set(band.x);
  return band.p.map((p, n) => {
    const f = band.f[n], e = band.e[n], point = {p, n, bad: bad.has(n), pull: band.u[n], f, e};
    if (!magnitudes) return {...point, y: f, low: f - e, high: f + e};
    // Below two standard deviations a magnitude means little: the limit f + 2σ, as an arrow.
    if (f < 2 * e) return {...point, y: abMag(Math.max(f, 0) + 2 * e), limit: true};
    return {...point, y: abMag(f), low: abMag(f + e), high: abMag(f - e)};
  }).filter((point) => known(point.p) && known(point.y));
}

/** Large drawing: one panel a band with the residuals below it. */
function drawLarge(curve, magnitudes, name) {
  const bands = curve.b, columns = bands.length <= 1 ? 1 : bands.length <= 4 ? 2 : 3;
  const cell = {w: columns === 1 ? 760 : columns === 2 ? 500 : 380, h: columns === 1 ? 420 : 300};
  const rows = Math.ceil(bands.length / columns), width = columns * cell.w, height = rows * cell.h;
  const phases = bands.flatMap((b) => [...b.p, ...curvePhases(b)]).filter(known);
  const range = [Math.min(...phases, 0) - 1, Math.max(...phases, 0) + 1];
  const font = getComputedStyle(document.body).fontFamily;
  const svg = el('svg', {xmlns: 'http://www.w3.org/2000/svg', viewBox: `0 0 ${width} ${height}`, width, height, role: 'img', 'aria-label': `Light curve of ${name}`, 'font-family': font, 'font-size': 11});
  svg.append(el('rect', {width, height, fill: themeColour('paper')}));
  bands.forEach((band, k) => {
    const x0 = (k % columns) * cell.w, y0 = Math.floor(k / columns) * cell.h;
    svg.append(bandPanel(band, k, {x: x0 + 62, y: y0 + 22, w: cell.w - 76, h: cell.h - 62}, range, magnitudes, k % columns === 0, Math.floor(k / columns) === rows - 1 || k + columns >= bands.length));
  });
  return svg;
}

function bandPanel(band, k, box, range, magnitudes, leftmost, lowest) {
  const ink = themeColour('ink'), muted = themeColour('muted'), rule = themeColour('rule'), colour = bandColour(k);
  const upper = box.h * 0.7, gap = 8, lower = box.h - upper - gap;
  const points = bandPoints(band, magnitudes);
  const phases = curvePhases(band);
  const model = phases.map((p, n) => {
    const f = band.cf[n], e = band.ce[n] || 0;
    if (!known(f)) return null;
    if (!magnitudes) return {p, y: f, low: f - e, high: f + e};
    return f > 0 && f > 0.004 * bandScale(band) ? {p, y: abMag(f), low: abMag(f + e), high: abMag(Math.max(f - e, 0.3 * f))} : null;
  }).filter(Boolean);
  const values = [...points.flatMap((q) => q.limit ? [q.y] : [q.low, q.high]), ...model.map((q) => q.y)].filter(known);
  let low = Math.min(...values), high = Math.max(...values);
  if (!magnitudes) low = Math.min(0, low);
  const margin = 0.06 * (high - low || 1);
  low -= margin;
  high += margin;
  const x = (p) => box.x + box.w * (p - range[0]) / (range[1] - range[0]);
  const y = (v) => magnitudes ? box.y + upper * (v - low) / (high - low) : box.y + upper * (1 - (v - low) / (high - low));
  const pullTop = Math.max(3.5, ...points.map((q) => Math.abs(q.pull) || 0)) * 1.12;
  const pullMiddle = box.y + upper + gap + lower / 2;
  const yPull = (u) => pullMiddle - (lower / 2) * u / pullTop;  // Brighter than the model: up.
  const g = el('g', {});
  const line = (x1, y1, x2, y2, stroke, extra = {}) => g.append(el('line', {x1: x1.toFixed(1), y1: y1.toFixed(1), x2: x2.toFixed(1), y2: y2.toFixed(1), stroke, ...extra}));
  const label = (tx, ty, text, extra = {}) => g.append(el('text', {x: tx, y: ty, fill: muted, ...extra}, text));

  for (const p of niceTicks(range[0], range[1], 6)) {
    line(x(p), box.y, x(p), box.y + box.h, rule, {'stroke-width': p === 0 ? 1.2 : 0.5});
    label(x(p), box.y + box.h + 14, fixed(p, 0), {'text-anchor': 'middle'});
  }
  const ticks = niceTicks(low, high, 5), step = ticks[1] - ticks[0];
  const decimals = Math.max(0, -Math.floor(Math.log10(step || 1) + 1e-9));
  for (const v of ticks) {
    line(box.x, y(v), box.x + box.w, y(v), rule, {'stroke-width': 0.5});
    label(box.x - 6, y(v) + 4, fixed(v, decimals), {'text-anchor': 'end'});
  }
  const edge = Math.floor(pullTop);
  for (const u of [-edge, 0, edge]) label(box.x - 6, yPull(u) + 4, signed(u, 0), {'text-anchor': 'end'});
  g.append(el('rect', {x: box.x, y: yPull(1), width: box.w, height: yPull(-1) - yPull(1), fill: rule, 'fill-opacity': 0.5}));
  line(box.x, pullMiddle, box.x + box.w, pullMiddle, ink, {'stroke-width': 0.8});
  g.append(el('rect', {x: box.x, y: box.y, width: box.w, height: upper, fill: 'none', stroke: rule}), el('rect', {x: box.x, y: box.y + upper + gap, width: box.w, height: lower, fill: 'none', stroke: rule}));

  if (model.length > 1) {
    const path = (list, key) => list.map((q, n) => `${n ? 'L' : 'M'}${x(q.p).toFixed(1)} ${y(q[key]).toFixed(1)}`).join('');
    const clipped = (list) => list.map((q) => ({...q, low: Math.max(low, q.low), high: Math.min(high, q.high)}));
    const inside = clipped(model);
    g.append(el('path', {d: path(inside, 'high') + path([...inside].reverse(), 'low').replace('M', 'L') + 'Z', fill: colour, 'fill-opacity': 0.2, class: 'error-band'}));
    g.append(el('path', {d: path(model, 'y'), fill: 'none', stroke: colour, 'stroke-width': 1.6, class: 'model'}));
  }
  for (const q of points) {
    const px = x(q.p), py = y(q.y);
    const title = el('title', {}, `${band.n}  MJD ${fixed(band.t[q.n], 2)}, phase ${signed(q.p, 1)} d\nflux ${withError(q.f, q.e)} uJy${q.bad ? '\nmistrusted' : ''}`);
    if (q.limit) {
      g.append(el('path', {d: `M${px - 4} ${py}h8M${px} ${py}v9m-3 -4l3 4l3 -4`, stroke: colour, fill: 'none', class: 'limit'}, title));
    } else {
      line(px, y(q.low), px, y(q.high), colour, {class: 'bar'});
      g.append(q.bad ? el('path', {d: `M${px - 4} ${py - 4}l8 8m0 -8l-8 8`, stroke: ink, 'stroke-width': 1.6, class: 'mistrusted'}, title) : el('circle', {cx: px.toFixed(1), cy: py.toFixed(1), r: 2.8, fill: colour, class: 'point'}, title));
    }
    if (!known(q.pull)) continue;
    const at = yPull(q.pull);
    line(px, yPull(q.pull - 1), px, yPull(q.pull + 1), colour, {'stroke-width': 0.8, opacity: 0.7});
    g.append(q.bad ? el('path', {d: `M${px - 3} ${at - 3}l6 6m0 -6l-6 6`, stroke: ink, 'stroke-width': 1.4}) : el('circle', {cx: px.toFixed(1), cy: at.toFixed(1), r: 2.2, fill: colour}));
  }
  label(box.x + box.w - 6, box.y + 16, band.n, {'text-anchor': 'end', fill: colour, 'font-weight': 600, 'font-size': 13});
  if (leftmost) {
    const turn = (ty) => ({transform: `translate(${box.x - 48} ${ty}) rotate(-90)`, 'text-anchor': 'middle', fill: ink, 'font-size': 12});
    g.append(el('text', turn(box.y + upper / 2), magnitudes ? 'magnitude (AB)' : 'flux (µJy)'), el('text', turn(pullMiddle), 'pull'));
  }
  if (lowest) label(box.x + box.w / 2, box.y + box.h + 30, 'rest-frame phase (d)', {'text-anchor': 'middle', fill: ink, 'font-size': 12});
  return g;
}
