// How a frame is put on paper: tubes, marks, words, legend. It draws what it is told and keeps no
// state but the pen; everything is in pixels of the page.

const DASHES = [[], [9, 6], [2.5, 5], [12, 5, 2.5, 5], [5, 9], [16, 4]];

class Painter {
  constructor(pen) {
    this.pen = pen;
  }

  // scene: data, look (colours), ground, ink, font, size, hover, selected.
  set(scene) {
    Object.assign(this, scene);
  }

  // Everything, once; the members as they lie on the screen, far ones first, come out.
  // swing: how much of the difference to the ghost is added, -1..1.
  frame(scene, lens, dots, swing) {
    this.set(scene);
    const { pen, data, look } = this;
    const { ghost } = data;
    pen.setTransform(dots, 0, 0, dots, 0, 0);
    pen.fillStyle = rgb(this.ground);
    pen.fillRect(0, 0, ...this.size);
    pen.lineCap = "round";
    pen.lineJoin = "round";
    if (ghost && ghost.swings) this.outline(data.joints, data.members, data.shown, lens, look.quiet, [3, 3]);
    const moved = (v, i, k) => v + swing * (ghost.joints[i][k] - v);
    const joints = swing ? data.joints.map((at, i) => at.map((v, k) => moved(v, i, k))) : data.joints;
    const bars = this.project(joints, lens);
    for (const bar of bars) this.tube(bar);
    for (const bar of bars) if (this.stressed(bar.member)) this.halo(bar);
    const missing = data.picked_out.map((out, m) => out && !data.shown[m]); // a brace to be added
    this.outline(joints, data.members, missing, lens, look.accent, [8, 5], 3);
    if (ghost && !ghost.swings) {
      const shown = ghost.members ? null : data.shown;
      this.outline(ghost.joints, ghost.members || data.members, shown, lens, look.accent, [6, 4]);
    }
    this.taken = [];
    this.marks(joints, lens, bars);
    if (data.legend) this.legend();
    this.compass(lens);
    this.labels(lens);
    return bars;
  }

  project(joints, lens) {
    const { members, shown, outside, value, colour } = this.data;
    const at = joints.map(lens);
    const bars = [];
    members.forEach(([from, to], member) => {
      if (!shown[member]) return;
      const [x1, y1, n1, s1] = at[from];
      const [x2, y2, n2, s2] = at[to];
      const real = (outside[member] / 1000) * ((s1 + s2) / 2);
      const amount = value ? value.parts[member] : 0;
      const width = value && colour !== "plain" ? this.widthOf(amount) : Math.min(Math.max(real, 2.6), 26);
      bars.push({ member, x1, y1, x2, y2, width, near: (n1 + n2) / 2, amount });
    });
    bars.sort((a, b) => a.near - b.near);
    const nears = bars.map((b) => b.near);
    const [low, high] = [Math.min(...nears), Math.max(...nears)];
    for (const bar of bars) bar.front = high - low > 1e-6 ? (bar.near - low) / (high - low) : 1;
    return bars;
  }

  widthOf(amount) {
    const size = Math.min(Math.max(Math.min(...this.size) / 460, 0.75), 1.3);
    return (2.2 + 9 * (amount || 0)) * size;
  }

  colourOf(member, amount) {
    const { colour, value, kind } = this.data;
    if (colour === "kind" && kind) {
      const k = kind.kind[member];
      return k < 0 ? this.look.quiet : this.look.palette[k % this.look.palette.length];
    }
    if (colour === "value" && value) {
      return amount === null ? this.look.quiet : along(this.look.ramp, amount);
    }
    return this.look.tube;
  }

  tube(bar) {
    const { colour, kind } = this.data;
    const fade = (1 - bar.front) * (colour === "plain" ? 0.55 : 0.25);
    const paint = (hue, more = fade) => rgb(mixed(channels(hue), this.ground, more));
    const body = this.colourOf(bar.member, bar.amount);
    const dash = colour === "kind" && kind ? DASHES[Math.max(kind.kind[bar.member], 0) % DASHES.length] : [];
    const edge = mixed(channels(body), [0, 0, 0], 0.5);
    this.line(bar, bar.width + 1.8, rgb(mixed(edge, this.ground, fade)));
    if (dash.length) {
      this.line(bar, bar.width, paint(rgb(mixed(channels(body), this.ground, 0.62)), fade * 0.5));
      this.pen.lineCap = "butt";
      this.line(bar, bar.width, paint(body), dash.map((d) => d * Math.max(bar.width / 5, 0.8)));
      this.pen.lineCap = "round";
    } else this.line(bar, bar.width, paint(body));
    if (bar.width >= 3.4) { // the light side, above
      const length = Math.hypot(bar.x2 - bar.x1, bar.y2 - bar.y1) || 1;
      let [nx, ny] = [(bar.y2 - bar.y1) / length, -(bar.x2 - bar.x1) / length];
      if (ny > 0 || (ny === 0 && nx > 0)) [nx, ny] = [-nx, -ny];
      const off = bar.width * 0.2;
      const lit = { x1: bar.x1 + nx * off, y1: bar.y1 + ny * off, x2: bar.x2 + nx * off, y2: bar.y2 + ny * off };
      this.pen.globalAlpha = 0.34;
      this.line(lit, bar.width * 0.3, "#FFFFFF");
      this.pen.globalAlpha = 1;
    }
  }

  stressed(member) {
    return member === this.hover || member === this.selected || this.data.picked_out[member];
  }

  halo(bar) {
    const { accent } = this.look;
    const wide = Math.max(bar.width, 3);
    const strong = bar.member === this.hover || bar.member === this.selected;
    this.line(bar, wide + (strong ? 8 : 5), accent);
    this.line(bar, wide + (strong ? 3.4 : 2.4), rgb(this.ground));
    this.line(bar, wide, this.colourOf(bar.member, bar.amount));
  }

  line({ x1, y1, x2, y2 }, width, colour, dash = []) {
    const pen = this.pen;
    pen.setLineDash(dash);
    pen.strokeStyle = colour;
    pen.lineWidth = width;
    pen.beginPath();
    pen.moveTo(x1, y1);
    pen.lineTo(x2, y2);
    pen.stroke();
    pen.setLineDash([]);
  }

  outline(joints, members, shown, lens, colour, dash, width = 1.2) {
    const at = joints.map(lens);
    members.forEach(([from, to], m) => {
      if (shown && !shown[m]) return;
      const [[x1, y1], [x2, y2]] = [at[from], at[to]];
      this.line({ x1, y1, x2, y2 }, width, colour, dash);
    });
  }

  marks(joints, lens, bars) {
    const { pickups, supports, loads } = this.data;
    const { accent, warning } = this.look;
    const ground = rgb(this.ground);
    for (const j of pickups) {
      const [x, y] = lens(joints[j]);
      this.shape([[x, y - 6], [x + 6, y], [x, y + 6], [x - 6, y]], ground, this.ink);
    }
    for (const [j, held] of supports) {
      const [x, y] = lens(joints[j]);
      this.shape([[x, y + 2], [x + 8, y + 15], [x - 8, y + 15]], ground, this.ink);
      this.text(held, x, y + 25, { size: 11, align: "center", colour: this.ink });
    }
    for (const [j, direction, words] of loads) {
      const [x, y] = lens(joints[j]);
      const tail = lens(tailOf(joints[j], direction, lens.radius));
      const length = Math.hypot(x - tail[0], y - tail[1]);
      this.taken.push([Math.min(x, tail[0]) - 5, Math.min(y, tail[1]), Math.max(x, tail[0]) + 5, Math.max(y, tail[1])]);
      this.pen.lineCap = "butt";
      if (length < 7) { // seen end on
        this.pen.beginPath();
        this.pen.arc(x, y, 6, 0, 2 * Math.PI);
        this.pen.strokeStyle = warning;
        this.pen.lineWidth = 2.5;
        this.pen.stroke();
      } else {
        const [ux, uy] = [(x - tail[0]) / length, (y - tail[1]) / length];
        const [hx, hy] = [x - ux * 4, y - uy * 4];
        this.line({ x1: tail[0], y1: tail[1], x2: hx - ux * 9, y2: hy - uy * 9 }, 3, warning);
        this.shape([[hx, hy], [hx - ux * 12 - uy * 6, hy - uy * 12 + ux * 6],
          [hx - ux * 12 + uy * 6, hy - uy * 12 - ux * 6]], warning, warning);
      }
      this.pen.lineCap = "round";
      if (words) this.text(words, tail[0], tail[1] + (tail[1] > y ? 14 : -9), { align: "center", colour: this.ink });
    }
    for (const m of [this.hover, this.selected]) {
      const bar = m >= 0 && bars.find((b) => b.member === m);
      if (!bar) continue;
      for (const [x, y] of [[bar.x1, bar.y1], [bar.x2, bar.y2]]) {
        this.pen.beginPath();
        this.pen.arc(x, y, 4, 0, 2 * Math.PI);
        this.pen.fillStyle = accent;
        this.pen.fill();
      }
    }
  }

  shape(corners, fill, edge) {
    const pen = this.pen;
    pen.beginPath();
    corners.forEach(([x, y], i) => (i ? pen.lineTo(x, y) : pen.moveTo(x, y)));
    pen.closePath();
    pen.fillStyle = fill;
    pen.fill();
    pen.strokeStyle = edge;
    pen.lineWidth = 1.6;
    pen.stroke();
  }

  labels(lens) {
    const { stations, labels } = this.data;
    const endOn = Math.abs(lens.towards[0]) > 0.94; // the stations lie behind one another
    const wanted = endOn ? [] : stations.map(([name, at]) => [lens(at), name, 22]);
    for (const [at, words] of labels) wanted.push([lens(at), words, -10]);
    wanted.sort((a, b) => b[0][2] - a[0][2]);
    for (const [[x, y], words, down] of wanted) {
      this.text(words, x, y + down, { align: "center", colour: this.look.muted, yields: true });
    }
  }

  measure(words, size, weight = 400) {
    this.pen.font = `${weight} ${size}px ${this.font}`;
    return this.pen.measureText(words).width;
  }

  // Words with a rim of the ground; those that yield are left out where others already stand.
  text(words, x, y, { size = 12, align = "left", colour = this.ink, weight = 400, yields = false } = {}) {
    const pen = this.pen;
    const wide = this.measure(words, size, weight);
    const left = x - { left: 0, center: wide / 2, right: wide }[align];
    const box = [left - 3, y - size, left + wide + 3, y + 4];
    const meets = (b) => b[0] < box[2] && b[2] > box[0] && b[1] < box[3] && b[3] > box[1];
    if (yields && (this.taken.some(meets) || box[0] < 0 || box[2] > this.size[0])) return;
    this.taken.push(box);
    pen.textAlign = align;
    pen.textBaseline = "alphabetic";
    pen.lineWidth = 3.5;
    pen.strokeStyle = rgb(this.ground);
    pen.strokeText(words, x, y);
    pen.fillStyle = colour;
    pen.fillText(words, x, y);
  }

  // ---- legend ------------------------------------------------------------------------------

  legendHeight() {
    const { colour, value, kind } = this.data;
    const keys = this.keys().length ? 22 : 0;
    if (colour === "value" && value) return 66 + keys;
    if (colour === "kind" && kind) return 48 + 18 * (this.rows(kind.names).length - 1) + keys;
    return keys ? 40 : 26;
  }

  keys() {
    const { pickups, supports, loads, ghost } = this.data;
    const keys = [];
    if (pickups.length) keys.push(["pickup", "pickup"]);
    if (supports.length) keys.push(["held", "held in the directions named"]);
    if (loads.length) keys.push(["load", "load"]);
    if (ghost) keys.push(["ghost", ghost.words]);
    return keys;
  }

  rows(names) {
    const room = this.size[0] - 120;
    const rows = [[]];
    let x = 0;
    names.forEach((name, k) => {
      const wide = 44 + this.measure(name, 12) + 14;
      if (x + wide > room && x > 0) {
        rows.push([]);
        x = 0;
      }
      rows[rows.length - 1].push([k, x]);
      x += wide;
    });
    return rows;
  }

  legend() {
    const { colour, value, kind } = this.data;
    const bottom = this.size[1];
    let y = bottom - 12;
    const keys = this.keys();
    if (keys.length) {
      this.keyRow(keys, y);
      y -= 22;
    }
    if (colour === "value" && value) this.valueLegend(value, y);
    else if (colour === "kind" && kind) {
      const rows = this.rows(kind.names);
      rows.forEach((row, r) => this.kindRow(kind, row, y - 18 * (rows.length - 1 - r)));
      this.text(kind.words, 16, y - 18 * rows.length - 1, { size: 12, weight: 600 });
    }
  }

  valueLegend(value, y) {
    const pen = this.pen;
    const [left, length] = [16, Math.min(190, this.size[0] - 150)];
    const axis = y - 20;
    for (let i = 0; i < length; i += 1) {
      const part = i / length;
      const half = this.widthOf(part) / 2;
      pen.fillStyle = along(this.look.ramp, part);
      pen.fillRect(left + i, axis - half, 1.2, 2 * half);
    }
    for (const [part, words] of value.ticks) {
      const x = left + part * length;
      this.line({ x1: x, y1: axis + 7, x2: x, y2: axis + 10 }, 1, this.look.muted);
      this.text(words, x, y, { align: part === 0 ? "left" : "center", colour: this.ink });
    }
    this.text(value.words, left, axis - 13, { weight: 600 });
  }

  kindRow(kind, row, y) {
    for (const [k, x] of row) {
      const bar = { x1: 18 + x, y1: y - 4, x2: 48 + x, y2: y - 4, width: 5, front: 1, amount: 1 };
      const hue = this.look.palette[k % this.look.palette.length];
      const dash = DASHES[k % DASHES.length];
      this.pen.lineCap = "butt";
      if (dash.length) this.line(bar, 6, rgb(mixed(channels(hue), this.ground, 0.62)));
      this.line(bar, 6, hue, dash);
      this.pen.lineCap = "round";
      this.text(kind.names[k], 54 + x, y);
    }
  }

  keyRow(keys, y) {
    let x = 16;
    const ground = rgb(this.ground);
    const room = this.size[0] - 110;
    for (const [what, words] of keys) {
      const m = y - 4;
      if (what === "pickup") this.shape([[x + 7, m - 5], [x + 12, m], [x + 7, m + 5], [x + 2, m]], ground, this.ink);
      if (what === "held") this.shape([[x + 7, m - 5], [x + 13, m + 5], [x + 1, m + 5]], ground, this.ink);
      if (what === "load") {
        this.line({ x1: x, y1: m, x2: x + 8, y2: m }, 2.5, this.look.warning);
        this.shape([[x + 15, m], [x + 8, m - 4], [x + 8, m + 4]], this.look.warning, this.look.warning);
      }
      if (what === "ghost") {
        const dash = this.data.ghost.swings ? [3, 3] : [6, 4];
        const hue = this.data.ghost.swings ? this.look.quiet : this.look.accent;
        this.line({ x1: x, y1: m, x2: x + 18, y2: m }, 2, hue, dash);
        x += 6;
      }
      let said = words;
      while (said.length > 4 && x + 20 + this.measure(said, 12) > room) said = `${said.slice(0, -2)}…`;
      this.text(said, x + 20, y);
      x += 20 + this.measure(said, 12) + 18;
    }
  }

  // Which way is front, right and up; a length to compare with when nothing is foreshortened.
  compass(lens) {
    const [width, height] = this.size;
    const [x, y] = [width - 58, height - 44];
    const { across, upward, towards } = lens;
    const arms = [["front", [-1, 0, 0]], ["right", [0, 1, 0]], ["up", [0, 0, 1]]]
      .map(([name, v]) => [name, dot(v, across), dot(v, upward), dot(v, towards)])
      .sort((a, b) => a[3] - b[3]);
    for (const [name, right, up] of arms) {
      if (Math.hypot(right, up) < 0.25) continue; // points at the eye
      const [ex, ey] = [x + 24 * right, y - 24 * up];
      this.line({ x1: x, y1: y, x2: ex, y2: ey }, 1.6, this.look.muted);
      const align = right > 0.35 ? "left" : right < -0.35 ? "right" : "center";
      this.text(name, ex + 4 * right, ey - 6 * up + 4, { size: 11, align, colour: this.look.muted });
    }
    if (!lens.flat) return;
    const { per_metre: perMetre, unit, steps } = this.data.ruler;
    const step = [...steps].reverse().find((s) => (s / perMetre) * lens.scale <= 130);
    if (!step) return;
    const long = (step / perMetre) * lens.scale;
    const [bx, by] = [width - 18 - long, height - 10];
    this.line({ x1: bx, y1: by, x2: bx + long, y2: by }, 1.6, this.look.muted);
    for (const tick of [bx, bx + long]) this.line({ x1: tick, y1: by - 3, x2: tick, y2: by + 3 }, 1.6, this.look.muted);
    this.text(`${step} ${unit}`, bx + long / 2, by - 5, { size: 11, align: "center", colour: this.look.muted });
  }
}
