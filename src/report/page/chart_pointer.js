// What pointer and keys do on a chart: hover names a supernova, a click opens it, a drag marks, arrows step through.

function nearest(entry, x, y, reach) {
  let best = null, closest = reach * reach;
  for (const point of geometry(entry).points) {
    const d = (point.x - x) ** 2 + (point.y - y) ** 2;
    if (d <= closest) closest = d, best = point;
  }
  return best;
}

function rowsInside(entry, x1, x2, y1, y2) {
  const rows = new Set();
  const {points, bars, chart} = geometry(entry);
  for (const p of points) {
    if (p.x >= x1 && p.x <= x2 && p.y >= y1 && p.y <= y2) rows.add(p.i);
  }
  for (const bar of bars) {
    if (bar.x2 < x1 || bar.x1 > x2 || bar.y2 < y1 || bar.y1 > y2) continue;
    for (const sn of supernovae) {
      if (sn.used && known(sn[chart.brush]) && sn[chart.brush] >= bar.b0 && sn[chart.brush] < bar.b1) rows.add(sn.i);
    }
  }
  return rows;
}

function followPointer(entry) {
  const {plot} = entry;
  const brush = plot.querySelector('.brush');
  let start = null, dragging = false;
  const place = (event) => {
    const box = plot.getBoundingClientRect();
    return {x: event.clientX - box.left, y: event.clientY - box.top};
  };
  const hover = (event) => {
    const {x, y} = place(event);
    const point = nearest(entry, x, y, 14);
    selection.look(point ? point.i : -1);
    plot.classList.toggle('over', Boolean(point));
    if (point) return showTip([...supernovaTip(point.i), page.lightcurves ? 'click for its light curve' : ''], event.clientX, event.clientY);
    const tip = geometry(entry).tips.find((t) => x >= t.x1 && x <= t.x2 && y >= t.y1 && y <= t.y2);
    if (tip) showTip(tip.text.split('\n'), event.clientX, event.clientY);
    else hideTip();
  };
  const stretch = (event) => {
    const end = place(event);
    const box = {x1: Math.min(start.x, end.x), x2: Math.max(start.x, end.x), y1: Math.min(start.y, end.y), y2: Math.max(start.y, end.y)};
    Object.assign(brush.style, {left: box.x1 + 'px', top: box.y1 + 'px', width: box.x2 - box.x1 + 'px', height: box.y2 - box.y1 + 'px'});
    return box;
  };

  plot.addEventListener('pointerdown', (event) => {
    if (event.button !== 0 || !entry.view) return;
    start = place(event);
    dragging = false;
  });
  plot.addEventListener('pointermove', (event) => {
    if (!entry.view) return;
    if (!start) return hover(event);
    const here = place(event);
    if (!dragging && Math.hypot(here.x - start.x, here.y - start.y) > 5 && (geometry(entry).points.length || entry.bars.length)) {
      dragging = true;
      plot.setPointerCapture(event.pointerId);
      brush.hidden = false;
      hideTip();
    }
    if (dragging) stretch(event);
  });
  plot.addEventListener('pointerup', (event) => {
    if (!start) return;
    if (dragging) {
      const box = stretch(event);
      selection.mark(rowsInside(entry, box.x1, box.x2, box.y1, box.y2), event.shiftKey);
    } else {
      const {x, y} = place(event);
      const point = nearest(entry, x, y, 14);
      if (point) openPanel(point.i);
      else selection.mark([]);
    }
    start = null;
    dragging = false;
    brush.hidden = true;
  });
  plot.addEventListener('pointercancel', () => { start = null; dragging = false; brush.hidden = true; });
  plot.addEventListener('pointerleave', () => { if (!dragging) { hideTip(); selection.look(-1); } });
  plot.addEventListener('blur', () => { hideTip(); selection.look(-1); });
  plot.addEventListener('keydown', (event) => {
    const step = {ArrowRight: 1, ArrowLeft: -1, ArrowDown: 1, ArrowUp: -1}[event.key];
    if (!entry.view) return;
    if (event.key === 'Enter' && selection.focus >= 0) return openPanel(selection.focus);
    if (!step) return;
    const order = [...geometry(entry).points].sort((a, b) => a.x - b.x || a.y - b.y);
    if (!order.length) return;
    event.preventDefault();
    const at = order.findIndex((p) => p.i === selection.focus);
    const next = order[at < 0 ? (step > 0 ? 0 : order.length - 1) : Math.min(order.length - 1, Math.max(0, at + step))];
    selection.look(next.i);
    const box = plot.getBoundingClientRect(), lines = supernovaTip(next.i);
    showTip(lines, box.left + next.x, box.top + next.y);
    announce(lines.join(', '));
  });
}
