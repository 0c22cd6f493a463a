// Views, distances and colours: functions of their arguments only.

// ---- geometry ------------------------------------------------------------------------------

// Screen axes of a view direction: across (to the right), upward, towards the eye.
function axes(a, p) {
  const [sa, ca, sp, cp] = [Math.sin(a), Math.cos(a), Math.sin(p), Math.cos(p)];
  return [[-sa, ca, 0], [-sp * ca, -sp * sa, cp], [cp * ca, cp * sa, sp]];
}

// 0 when looking along an axis of the vehicle (a true drawing), 1 when well off it.
function slant(a, p) {
  const towards = axes(a, p)[2];
  const off = Math.acos(Math.min(Math.max(...towards.map(Math.abs)), 1));
  const t = Math.min(Math.max((off - 0.5 * DEGREE) / (18 * DEGREE), 0), 1);
  return t * t * (3 - 2 * t);
}

// What an eye sees in a direction: x and y on its plane [m], nearness [m] and enlargement.
function eyeOf(a, p, box) {
  const [across, upward, towards] = axes(a, p);
  const centre = box[0].map((low, i) => (low + box[1][i]) / 2);
  const radius = Math.hypot(...box[0].map((low, i) => box[1][i] - low)) / 2 || 1;
  const bend = slant(a, p) / (EYE * radius);
  const sees = (point) => {
    const d = [point[0] - centre[0], point[1] - centre[1], point[2] - centre[2]];
    const near = dot(d, towards);
    const size = 1 / Math.max(1 - near * bend, 0.2);
    return [dot(d, across) * size, dot(d, upward) * size, near, size];
  };
  return { sees, across, upward, towards, radius, flat: bend === 0 };
}

// The rectangle [m] that everything drawn fills, seen in a direction: middle x, y, width, height.
function fitted({ a, p }, data) {
  const box = extent(data.joints, data.members, data.shown);
  const eye = eyeOf(a, p, box);
  const points = used(data.joints, data.members, data.shown);
  for (const [j, direction] of data.loads) points.push(tailOf(data.joints[j], direction, eye.radius));
  const seen = points.map(eye.sees);
  const side = (i) => {
    const [low, high] = [Math.min(...seen.map((s) => s[i])), Math.max(...seen.map((s) => s[i]))];
    return [(low + high) / 2, Math.max(high - low, 0.1)];
  };
  const [[x, width], [y, height]] = [side(0), side(1)];
  return { box, x, y, width, height };
}

// Where the arrow of a load begins.
function tailOf(joint, direction, radius) {
  return joint.map((v, i) => v - direction[i] * radius * 0.2);
}

function used(joints, members, shown) {
  const met = new Set();
  members.forEach((ends, m) => shown[m] && ends.forEach((j) => met.add(j)));
  return met.size ? [...met].map((j) => joints[j]) : [...joints];
}

function extent(joints, members, shown) {
  const points = used(joints, members, shown);
  const of = (pick) => [0, 1, 2].map((i) => pick(...points.map((p) => p[i])));
  return [of(Math.min), of(Math.max)];
}

// A box so different from the one the view was fitted to that the view must follow.
function grown(old, now) {
  const size = ([low, high]) => Math.hypot(...low.map((v, i) => high[i] - v)) || 1;
  const allowed = 0.12 * size(old);
  const outside = [0, 1, 2].some((i) => now[0][i] < old[0][i] - allowed || now[1][i] > old[1][i] + allowed);
  return outside || size(now) < 0.6 * size(old);
}

function distance(x, y, { x1, y1, x2, y2 }) {
  const [dx, dy] = [x2 - x1, y2 - y1];
  const t = Math.min(Math.max(((x - x1) * dx + (y - y1) * dy) / (dx * dx + dy * dy || 1), 0), 1);
  return Math.hypot(x - x1 - t * dx, y - y1 - t * dy);
}

function dot(a, b) {
  return a[0] * b[0] + a[1] * b[1] + a[2] * b[2];
}

function element(kind, words = "") {
  const made = document.createElement(kind);
  made.textContent = words;
  return made;
}

// ---- colours -------------------------------------------------------------------------------

function channels(colour) {
  if (colour.startsWith("#")) {
    const long = colour.length === 4 ? colour.replace(/[^#]/g, "$&$&") : colour;
    return [1, 3, 5].map((i) => parseInt(long.slice(i, i + 2), 16));
  }
  return colour.match(/[\d.]+/g).slice(0, 3).map(Number);
}

function rgb([r, g, b]) {
  return `rgb(${Math.round(r)}, ${Math.round(g)}, ${Math.round(b)})`;
}

function mixed(first, second, part) {
  return first.map((v, i) => v + (second[i] - v) * part);
}

function along(ramp, part) {
  const place = Math.min(Math.max(part || 0, 0), 1) * (ramp.length - 1);
  const step = Math.min(Math.floor(place), ramp.length - 2);
  return rgb(mixed(channels(ramp[step]), channels(ramp[step + 1]), place - step));
}

function luminance(colour) {
  const [r, g, b] = colour.map((c) => {
    const v = c / 255;
    return v <= 0.04045 ? v / 12.92 : ((v + 0.055) / 1.055) ** 2.4;
  });
  return 0.2126 * r + 0.7152 * g + 0.0722 * b;
}
