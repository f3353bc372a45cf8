// Small helpers: elements made without markup, numbers with the digits their errors allow, colours of the theme.

const byId = (id) => document.getElementById(id);

/** Element with properties and children; strings become text, never markup. */
function el(tag, properties = {}, ...children) {
  const node = tag === 'svg' || svgTags.has(tag) ? document.createElementNS('http://www.w3.org/2000/svg', tag) : document.createElement(tag);
  for (const [key, value] of Object.entries(properties)) {
    if (value === undefined || value === null || value === false) continue;
    if (key.startsWith('on')) node.addEventListener(key.slice(2), value);
    else if (key === 'class') node.setAttribute('class', value);
    else node.setAttribute(key, value === true ? '' : value);
  }
  for (const child of children.flat()) {
    if (child !== null && child !== undefined && child !== '') node.append(child);
  }
  return node;
}
// The page itself makes no HTML title, so the name is free for that of a drawing.
const svgTags = new Set(['g', 'path', 'line', 'rect', 'circle', 'text', 'title']);

const known = (value) => value !== null && value !== undefined && Number.isFinite(value);

/** Fixed decimals with a true minus sign; an en dash for what is not known. */
function fixed(value, decimals) {
  if (!known(value)) return '–';
  const text = value.toFixed(Math.max(0, decimals));
  return /[1-9]/.test(text) ? text.replace('-', '−') : text.replace('-', '');
}
function signed(value, decimals) {
  const text = fixed(value, decimals);
  return value > 0 && /[1-9]/.test(text) ? '+' + text : text;
}
/** Decimals that show an error with two significant digits, the rule of digits.h. */
function decimalsFor(error) {
  if (!known(error) || error <= 0) return 3;
  let decimals = 1 - Math.floor(Math.log10(error));
  if (Math.round(error * 10 ** decimals) >= 100) decimals -= 1;
  return Math.min(8, Math.max(0, decimals));
}
function withError(value, error, sign = false) {
  if (!known(value)) return '–';
  if (!known(error) || error <= 0) return fixed(value, 3);
  const decimals = decimalsFor(error);
  return `${sign ? signed(value, decimals) : fixed(value, decimals)} ± ${fixed(error, decimals)}`;
}
const plural = (count, one, many) => `${count} ${count === 1 ? one : many}`;

/** "B", "B and V", "B, V and R". */
function listed(words) {
  if (words.length < 2) return words.join('');
  return words.slice(0, -1).join(', ') + ' and ' + words[words.length - 1];
}

/** Colour of the present theme: a custom property of the style sheet. */
const themeColour = (name) => getComputedStyle(document.documentElement).getPropertyValue('--' + name).trim() || '#888';

/** Round steps from low to high, about `count` of them. */
function niceTicks(low, high, count) {
  const span = high - low;
  if (!(span > 0)) return [low];
  const decade = 10 ** Math.floor(Math.log10(span / count));
  const step = [1, 2, 5, 10].map((k) => k * decade).find((s) => span / s <= count * 1.2) || 10 * decade;
  const ticks = [];
  for (let k = Math.ceil(low / step - 1e-9); k * step <= high + 1e-9 * span; ++k) ticks.push(k * step);
  return ticks;
}

function announce(text) { byId('live').textContent = text; }

/** Hands a file to the browser's download. */
function save(name, content, type) {
  const url = typeof content === 'string' && content.startsWith('data:') ? content : URL.createObjectURL(new Blob([content], {type}));
  const link = el('a', {href: url, download: name});
  document.body.append(link);
  link.click();
  link.remove();
  if (url.startsWith('blob:')) setTimeout(() => URL.revokeObjectURL(url), 10000);
}

/**
 * Text of a CSV table. A text that a spreadsheet would take for a formula gets an apostrophe in front,
 * since names come from files of unknown origin.
 */
function csvText(header, rows) {
  const cell = (value) => {
    if (value === null || value === undefined) return '';
    if (typeof value === 'number') return String(value);
    let text = String(value);
    if (/^[=+\-@\t\r]/.test(text)) text = "'" + text;
    return /[",\n\r]/.test(text) ? '"' + text.replaceAll('"', '""') + '"' : text;
  };
  return [header, ...rows].map((row) => row.map(cell).join(',')).join('\r\n') + '\r\n';
}

/** Picture file of an SVG text, twice as many pixels as points. */
function pngOfSvg(text, width, height, background) {
  return new Promise((done, fail) => {
    const image = new Image();
    image.onload = () => {
      const canvas = el('canvas', {width: 2 * width, height: 2 * height});
      const pen = canvas.getContext('2d');
      pen.fillStyle = background;
      pen.fillRect(0, 0, canvas.width, canvas.height);
      pen.drawImage(image, 0, 0, canvas.width, canvas.height);
      canvas.toBlob((blob) => blob ? done(blob) : fail(new Error('no picture')), 'image/png');
    };
    image.onerror = () => fail(new Error('the drawing could not be read back'));
    image.src = 'data:image/svg+xml;charset=utf-8,' + encodeURIComponent(text);
  });
}
