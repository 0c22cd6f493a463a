// A vehicle frame on a canvas: turn it, point at a member, click one and its name goes to Python.
//
// Vehicle axes: x rearward, y to the right, z up [m]. A view direction is given by the angle `a`
// of the eye round z (from x towards y) and its height `p` above the horizon, both in radians.
// The host page calls the default function again whenever data or colours change; the view of one
// place stays alive in between, and its camera even when the place was left and entered again.

const DEGREE = Math.PI / 180;
const VIEWS = {
  "3d": { a: -122 * DEGREE, p: 24 * DEGREE },
  side: { a: -90 * DEGREE, p: 0 },
  plan: { a: -90 * DEGREE, p: 90 * DEGREE },
  front: { a: -180 * DEGREE, p: 0 },
};
const SAID = { "3d": "3D view", side: "side view", plan: "plan view", front: "front view" };
const EYE = 4.5; // distance of the eye in radii of the frame, for the slight perspective

const cameras = new Map(); // by key of the view
const living = new WeakMap(); // by the element the view stands in

export default function frameView({ data, parentElement, setStateValue }) {
  let view = living.get(parentElement);
  if (!view || view.gone) {
    view = new FrameView(parentElement);
    living.set(parentElement, view);
  }
  view.show(data, (name) => setStateValue("member", name));
  const call = view.calls; // an outdated call must not end the view a later call is using
  return () => view.calls === call && view.end();
}

class FrameView {
  constructor(root) {
    const find = (what) => root.querySelector(what);
    this.canvas = find("canvas");
    this.painter = new Painter(this.canvas.getContext("2d"));
    this.stage = find(".stage");
    this.tip = find(".tip");
    this.hint = find(".hint");
    this.words = find('[data-role="words"]');
    this.said = find('[data-role="said"]');
    this.buttons = [...root.querySelectorAll("button")];
    this.calls = 0;
    this.gone = false;
    this.hover = -1;
    this.selected = -1;
    this.fingers = new Map();
    this.still = matchMedia("(prefers-reduced-motion: reduce)").matches;
    this.swinging = !this.still;
    this.quit = new AbortController();
    this.sized = new ResizeObserver(() => this.ask());
    this.sized.observe(this.stage);
    this.listen();
  }

  // ---- data in ---------------------------------------------------------------------------

  show(data, tell) {
    this.calls += 1;
    this.tell = tell;
    this.data = data;
    this.canvas.style.height = `${data.height}px`;
    this.canvas.setAttribute("aria-label", data.words);
    this.words.textContent = data.help;
    this.selected = data.selected;
    this.hover = -1;
    this.hideTip();
    this.colours();
    let camera = cameras.get(data.key);
    if (!camera) {
      camera = { ...VIEWS[data.view], view: data.view, home: data.view, zoom: 1, pan: [0, 0] };
      camera.fit = fitted(VIEWS[data.view], data);
      cameras.set(data.key, camera);
    } else if (grown(camera.fit.box, extent(data.joints, data.members, data.shown))) {
      camera.fit = fitted(VIEWS[camera.home], data);
    }
    this.camera = camera;
    const swing = this.button("swing");
    swing.hidden = !(data.ghost && data.ghost.swings);
    this.pressed();
    this.ask();
  }

  colours() {
    const style = getComputedStyle(this.stage);
    const ground = style.getPropertyValue("--st-background-color").trim() || "#FFFFFF";
    this.ground = channels(ground);
    this.look = this.data[luminance(this.ground) < 0.3 ? "dark" : "light"];
    const text = style.getPropertyValue("--st-text-color").trim();
    this.ink = text || this.look.ink;
    this.font = style.getPropertyValue("--st-font").trim() || "sans-serif";
  }

  end() {
    this.gone = true;
    this.quit.abort();
    this.sized.disconnect();
    cancelAnimationFrame(this.wanted);
  }

  // ---- hands -----------------------------------------------------------------------------

  listen() {
    const on = (what, name, does, more = {}) =>
      what.addEventListener(name, does, { signal: this.quit.signal, ...more });
    const c = this.canvas;
    on(c, "pointerdown", (e) => this.press(e));
    on(c, "pointermove", (e) => this.move(e));
    on(c, "pointerup", (e) => this.release(e));
    on(c, "pointercancel", (e) => this.fingers.delete(e.pointerId));
    on(c, "pointerleave", () => !this.fingers.size && this.point(-1));
    on(c, "contextmenu", (e) => e.preventDefault());
    on(c, "wheel", (e) => this.wheel(e), { passive: false });
    on(c, "keydown", (e) => this.key(e));
    on(c, "focus", () => { this.focused = true; });
    on(c, "blur", () => { this.focused = false; });
    for (const button of this.buttons) {
      on(button, "click", () =>
        button.dataset.view ? this.turnTo(button.dataset.view) : this.order(button.dataset.do));
    }
    on(window, "resize", () => this.ask());
  }

  press(e) {
    this.canvas.focus({ preventScroll: true });
    this.canvas.setPointerCapture(e.pointerId);
    this.fingers.set(e.pointerId, [e.offsetX, e.offsetY]);
    this.pinch = this.spread();
    this.moved = this.fingers.size > 1 ? 99 : 0;
    this.pans = e.shiftKey || e.button === 1 || e.button === 2;
    this.point(-1);
  }

  move(e) {
    const last = this.fingers.get(e.pointerId);
    if (!last) return this.point(this.memberAt(e.offsetX, e.offsetY), [e.offsetX, e.offsetY]);
    const dx = e.offsetX - last[0];
    const dy = e.offsetY - last[1];
    this.fingers.set(e.pointerId, [e.offsetX, e.offsetY]);
    this.moved += Math.abs(dx) + Math.abs(dy);
    if (this.moved < 4) return undefined;
    this.canvas.classList.add("turning");
    if (this.fingers.size > 1) {
      this.panBy(dx / 2, dy / 2);
      const spread = this.spread();
      if (this.pinch > 0 && spread > 0) this.zoomBy(spread / this.pinch);
      this.pinch = spread;
    } else if (this.pans) this.panBy(dx, dy);
    else this.turnBy(-dx * 0.45, dy * 0.45);
    return undefined;
  }

  release(e) {
    const clicked = this.fingers.size === 1 && this.moved < 4 && e.button === 0;
    this.fingers.delete(e.pointerId);
    this.pinch = this.spread();
    this.canvas.classList.remove("turning");
    if (clicked) this.pick(this.memberAt(e.offsetX, e.offsetY));
  }

  spread() {
    const [a, b] = [...this.fingers.values()];
    return b ? Math.hypot(a[0] - b[0], a[1] - b[1]) : 0;
  }

  wheel(e) {
    if (!this.focused && !e.ctrlKey && !e.metaKey) {
      this.hint.classList.add("shown"); // the page keeps its scrolling
      clearTimeout(this.hinting);
      this.hinting = setTimeout(() => this.hint.classList.remove("shown"), 1200);
      return;
    }
    e.preventDefault();
    this.zoomBy(Math.exp(-Math.sign(e.deltaY) * Math.min(Math.abs(e.deltaY), 60) * 0.004),
      [e.offsetX, e.offsetY]);
  }

  key(e) {
    if (e.ctrlKey || e.metaKey || e.altKey) return;
    const step = 7.5;
    const arrows = { ArrowLeft: [1, 0], ArrowRight: [-1, 0], ArrowUp: [0, 1], ArrowDown: [0, -1] };
    const orders = {
      "+": "in", "=": "in", "-": "out", "−": "out", 0: "fit", n: "next", p: "previous",
      Enter: "pick", " ": "pick", Escape: "clear",
    };
    const views = { 1: "3d", 2: "side", 3: "plan", 4: "front" };
    const [x, y] = arrows[e.key] || [];
    if (x !== undefined && e.shiftKey) this.panBy(-24 * x, 24 * -y);
    else if (x !== undefined) this.turnBy(x * step, y * step);
    else if (views[e.key]) this.turnTo(views[e.key]);
    else if (orders[e.key]) this.order(orders[e.key]);
    else return;
    e.preventDefault();
    e.stopPropagation();
  }

  order(what) {
    if (what === "in") this.zoomBy(1.25);
    else if (what === "out") this.zoomBy(0.8);
    else if (what === "fit") this.turnTo(this.camera.home);
    else if (what === "next") this.step(1);
    else if (what === "previous") this.step(-1);
    else if (what === "pick") this.pick(this.hover);
    else if (what === "clear") this.pick(-1);
    else if (what === "save") this.save();
    else if (what === "swing") {
      this.swinging = !this.swinging;
      this.pressed();
      this.ask();
    }
  }

  // ---- camera ----------------------------------------------------------------------------

  turnBy(a, p) {
    const c = this.camera;
    this.gliding = null;
    c.view = null;
    c.a += a * DEGREE;
    c.p = Math.min(Math.max(c.p + p * DEGREE, -90 * DEGREE), 90 * DEGREE);
    this.pressed();
    this.ask();
  }

  panBy(dx, dy) {
    this.camera.pan = [this.camera.pan[0] + dx, this.camera.pan[1] + dy];
    this.hideTip();
    this.ask();
  }

  zoomBy(times, at) {
    const c = this.camera;
    const zoom = Math.min(Math.max(c.zoom * times, 0.3), 20);
    const [x, y] = at || this.middle();
    const [mx, my] = this.middle();
    const ratio = zoom / c.zoom; // what lies under the pointer stays there
    c.pan = [x - mx - (x - mx - c.pan[0]) * ratio, y - my - (y - my - c.pan[1]) * ratio];
    c.zoom = zoom;
    this.hideTip();
    this.ask();
  }

  turnTo(view) {
    const c = this.camera;
    const from = { a: c.a, p: c.p, zoom: this.scale(), pan: c.pan };
    Object.assign(c, { view, home: view, fit: fitted(VIEWS[view], this.data) });
    const turns = Math.round((from.a - VIEWS[view].a) / (2 * Math.PI));
    from.a -= turns * 2 * Math.PI;
    Object.assign(c, VIEWS[view], { zoom: 1, pan: [0, 0] });
    from.zoom /= this.scale();
    this.said.textContent = SAID[view];
    this.pressed();
    this.gliding = this.still ? null : { from, to: { ...c }, start: performance.now() };
    this.ask();
  }

  glide(now) {
    const { from, to, start } = this.gliding;
    const t = Math.min((now - start) / 240, 1);
    const s = t * t * (3 - 2 * t);
    const between = (a, b) => a + (b - a) * s;
    this.camera.a = between(from.a, to.a);
    this.camera.p = between(from.p, to.p);
    this.camera.zoom = between(from.zoom, to.zoom);
    this.camera.pan = [between(from.pan[0], 0), between(from.pan[1], 0)];
    if (t < 1) this.ask();
    else this.gliding = null;
  }

  // Room that nothing else covers: left, top, right, bottom [px].
  room() {
    this.painter.set(this.scene());
    const below = this.data.legend ? this.painter.legendHeight() : 18;
    const names = this.data.stations.length ? 16 : 0;
    return [26, 52, this.size()[0] - 26, this.size()[1] - below - names];
  }

  middle() {
    const [left, top, right, bottom] = this.room();
    return [(left + right) / 2, (top + bottom) / 2];
  }

  size() {
    return [this.stage.clientWidth || 1, this.data.height];
  }

  // Pixels for one metre: the frame fills the room in the view last chosen, times the zoom.
  scale() {
    const { fit, zoom } = this.camera;
    const [left, top, right, bottom] = this.room();
    return zoom * Math.min((right - left) / fit.width, (bottom - top) / fit.height);
  }

  // A function from a point [m] to x, y [px], nearness to the eye [m] and pixels for one metre.
  lens() {
    const { a, p, pan, fit } = this.camera;
    const scale = this.scale();
    const eye = eyeOf(a, p, fit.box);
    const [mx, my] = this.middle();
    const lens = (point) => {
      const [x, y, near, size] = eye.sees(point);
      return [mx + pan[0] + (x - fit.x) * scale, my + pan[1] - (y - fit.y) * scale, near, size * scale];
    };
    return Object.assign(lens, eye, { scale });
  }

  // ---- members under the hand --------------------------------------------------------------

  memberAt(x, y) {
    let best = -1;
    let least = 8;
    for (const bar of this.bars || []) { // far to near: a nearer member wins when both are hit
      const off = Math.max(distance(x, y, bar) - bar.width / 2 - 1, 0);
      if (off <= least) [best, least] = [bar.member, off];
    }
    return best;
  }

  point(member, at) {
    this.canvas.classList.toggle("over", member >= 0);
    if (member !== this.hover) {
      this.hover = member;
      this.ask();
    }
    if (member >= 0 && at) this.showTip(member, at);
    else this.hideTip();
  }

  step(by) {
    const order = this.data.names.map((_, m) => m).filter((m) => this.data.shown[m]);
    if (!order.length) return;
    const now = order.indexOf(this.hover >= 0 ? this.hover : this.selected);
    const next = order[(now + by + order.length) % order.length];
    this.hover = next;
    const bar = (this.bars || []).find((b) => b.member === next);
    if (bar) this.showTip(next, [(bar.x1 + bar.x2) / 2, (bar.y1 + bar.y2) / 2]);
    this.said.textContent = this.facts(next).join(", ");
    this.ask();
  }

  pick(member) {
    if (member === this.selected && member < 0) return;
    this.selected = member === this.selected ? -1 : member;
    const name = this.selected < 0 ? null : this.data.names[this.selected];
    this.said.textContent = name ? `${name} picked` : "nothing picked";
    this.tell(name);
    this.ask();
  }

  facts(member) {
    const { names, details, value, kind } = this.data;
    const facts = [names[member], details[member]];
    if (value) facts.push(`${value.words}: ${value.texts[member]}`);
    if (kind && kind.kind[member] >= 0) facts.push(`${kind.words}: ${kind.names[kind.kind[member]]}`);
    return facts;
  }

  showTip(member, [x, y]) {
    const [name, ...rest] = this.facts(member);
    this.tip.replaceChildren(element("b", name), ...rest.map((line) => element("span", line)));
    this.tip.hidden = false;
    const [width, height] = this.size();
    const left = x + 16 + this.tip.offsetWidth > width ? x - 12 - this.tip.offsetWidth : x + 16;
    const top = y + 16 + this.tip.offsetHeight > height ? y - 12 - this.tip.offsetHeight : y + 16;
    this.tip.style.left = `${Math.max(left, 4)}px`;
    this.tip.style.top = `${Math.max(top, 4)}px`;
  }

  hideTip() {
    this.tip.hidden = true;
  }

  pressed() {
    for (const b of this.buttons) {
      if (b.dataset.view) b.setAttribute("aria-pressed", String(b.dataset.view === this.camera.view));
    }
    this.button("swing").textContent = this.swinging ? "Pause" : "Play";
  }

  button(order) {
    return this.buttons.find((b) => b.dataset.do === order);
  }

  save() {
    this.canvas.toBlob((picture) => {
      const link = element("a");
      link.href = URL.createObjectURL(picture);
      link.download = `${this.data.title.replace(/[^\w-]+/g, "-").replace(/^-+|-+$/g, "")}.png`;
      link.click();
      setTimeout(() => URL.revokeObjectURL(link.href), 1000);
    });
  }

  // ---- painting ----------------------------------------------------------------------------

  ask() {
    cancelAnimationFrame(this.wanted);
    this.wanted = requestAnimationFrame((now) => !this.gone && this.data && this.paint(now));
  }

  paint(now) {
    if (this.gliding) this.glide(now);
    const [width, height] = this.size();
    const dots = window.devicePixelRatio || 1;
    const [w, h] = [Math.round(width * dots), Math.round(height * dots)];
    if (this.canvas.width !== w || this.canvas.height !== h) {
      this.canvas.width = w;
      this.canvas.height = h;
    }
    const swings = this.data.ghost && this.data.ghost.swings;
    const part = swings && this.swinging ? Math.sin(now / 420) : 1;
    this.bars = this.painter.frame(this.scene(), this.lens(), dots, swings ? part : 0);
    if (swings && this.swinging) this.ask();
  }

  scene() {
    const { data, look, ground, ink, font, hover, selected } = this;
    return { data, look, ground, ink, font, hover, selected, size: this.size() };
  }
}
