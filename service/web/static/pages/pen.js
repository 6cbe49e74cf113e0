// A pen on a canvas that knows the lines of a drawing: thick, thin, dashed, chain (ISO 128), with
// arrowheads, letters and dimension lines (ISO 129). Everything in CSS pixels.
// Idea: colours come from the page's own tokens, so light and dark are one drawing.
// Left out: what is drawn, and scales (projection.js).

/** Line kinds: width, pattern, and which of the page's colours. */
const KINDS = {
  thick: [1.9, [], "ink"],
  medium: [1.3, [], "ink"],
  thin: [0.9, [], "ink"],
  faint: [1, [], "faint"],
  dashed: [0.9, [6, 3], "ink"],
  heavyDashed: [1.9, [7, 4], "ink"],
  chain: [0.8, [14, 3, 2, 3], "quiet"],
  path: [1.2, [], "accent"],
  long: [1.2, [9, 3], "ink"],
  dashDot: [1.2, [6, 2.5, 1.5, 2.5], "ink"],
};
const FALLBACK = { ink: "#14181c", paper: "#fbfaf7", quiet: "#4b545b", faint: "#dcdad3",
  accent: "#3d5a73" };
const ARROW = 9;

/**
 * Return a pen for a canvas; `begin()` sizes it to its place on the page and wipes it.
 * @param {HTMLCanvasElement} canvas
 */
export function pen(canvas) {
  const context = canvas.getContext("2d");
  const state = { colours: { ...FALLBACK }, width: 0, height: 0, font: "sans-serif" };
  const size = () => [state.width, state.height];
  return {
    canvas, context, begin: () => begin(canvas, context, state), size,
    colour: (name) => state.colours[name] ?? name,
    tint: () => readColours(canvas, state),
    line: (points, kind = "thin") => line(context, state, points, kind, false),
    closed: (points, kind = "thin", fill) => line(context, state, points, kind, true, fill),
    circle: (x, y, r, kind, fill) => ellipse(context, state, [x, y, r, r, 0], kind, fill),
    ellipse: (x, y, a, b, turn, kind, fill) =>
      ellipse(context, state, [x, y, a, b, turn], kind, fill),
    tube: (points, r, kind) => tube(context, state, points, r, kind),
    arrow: (from, to, kind = "thin", size = ARROW) => arrow(context, state, from, to, kind, size),
    letters: (text, x, y, how) => letters(context, state, text, x, y, how),
    widthOf: (text, px = 11) => widthOf(context, state, text, px),
    hatch: (points, gap) => hatch(context, state, points, gap),
    dimension: (from, to, off, text) => dimension(context, state, from, to, off, text),
  };
}

function readColours(canvas, state) {
  const style = getComputedStyle(canvas);
  for (const name of Object.keys(FALLBACK)) {
    state.colours[name] = style.getPropertyValue(`--${name}`).trim() || FALLBACK[name];
  }
  state.font = style.fontFamily || "sans-serif";
}

function begin(canvas, context, state) {
  // Who draws for a printer says so: paper shows finer lines than a screen.
  const ratio = Number(canvas.dataset.ratio) || Math.min(globalThis.devicePixelRatio || 1, 2);
  const [width, height] = [canvas.clientWidth, canvas.clientHeight];
  const wanted = [Math.round(width * ratio), Math.round(height * ratio)];
  if (canvas.width !== wanted[0] || canvas.height !== wanted[1]) {
    [canvas.width, canvas.height] = wanted;
  }
  if (!state.width) readColours(canvas, state);
  Object.assign(state, { width, height });
  context.setTransform(ratio, 0, 0, ratio, 0, 0);
  context.clearRect(0, 0, width, height);
  context.lineJoin = context.lineCap = "round";
}

function use(context, state, kind) {
  const [width, dashes, colour] = KINDS[kind];
  context.lineWidth = width;
  context.strokeStyle = state.colours[colour];
  context.setLineDash(dashes);
  context.lineCap = dashes.length ? "butt" : "round";
}

function trace(context, points, close) {
  context.beginPath();
  for (let i = 0; i < points.length; i++) {
    if (i) context.lineTo(points[i][0], points[i][1]);
    else context.moveTo(points[i][0], points[i][1]);
  }
  if (close) context.closePath();
}

function line(context, state, points, kind, close, fill) {
  if (points.length < 2) return;
  trace(context, points, close);
  if (fill) {
    context.fillStyle = state.colours[fill] ?? fill;
    context.fill();
  }
  if (!kind) return;
  use(context, state, kind);
  context.stroke();
}

function ellipse(context, state, [x, y, a, b, turn], kind, fill) {
  context.beginPath();
  context.ellipse(x, y, Math.max(a, 0), Math.max(b, 0), turn, 0, 2 * Math.PI);
  if (fill) {
    context.fillStyle = state.colours[fill] ?? fill;
    context.fill();
  }
  if (!kind) return;
  use(context, state, kind);
  context.stroke();
}

/** Two parallel edges round a line, paper between them: a bar whose joints are round. */
function tube(context, state, points, r, kind = "thick") {
  const [width, dashes, colour] = KINDS[kind];
  context.setLineDash([]);
  context.lineCap = context.lineJoin = "round";
  trace(context, points, false);
  context.strokeStyle = state.colours[colour];
  context.lineWidth = 2 * r + width;
  context.stroke();
  context.strokeStyle = state.colours.paper;
  context.lineWidth = Math.max(2 * r - width, 0.5);
  context.stroke();
  if (dashes.length) {
    // Cuts across both edges: a bar that is drawn dashed.
    context.setLineDash([dashes[1], dashes[0]]);
    context.lineCap = "butt";
    context.lineWidth = 2 * r + width + 1;
    context.stroke();
  }
}

function arrow(context, state, from, to, kind, size) {
  const angle = Math.atan2(to[1] - from[1], to[0] - from[0]);
  const length = Math.hypot(to[0] - from[0], to[1] - from[1]);
  const head = Math.min(size, length);
  const [c, s] = [Math.cos(angle), Math.sin(angle)];
  line(context, state, [from, [to[0] - c * head * 0.8, to[1] - s * head * 0.8]], kind, false);
  const side = head * 0.27; // 30 degrees in all
  const back = [to[0] - c * head, to[1] - s * head];
  trace(context, [to, [back[0] - s * side, back[1] + c * side],
    [back[0] + s * side, back[1] - c * side]], true);
  context.fillStyle = context.strokeStyle;
  context.fill();
}

function setFont(context, state, px, weight = 400) {
  context.font = `${weight} ${px}px ${state.font}`;
}

function widthOf(context, state, text, px) {
  setFont(context, state, px);
  return context.measureText(text).width;
}

/** Write; `halo` keeps lines out of the letters. */
function letters(context, state, text, x, y, how = {}) {
  const { px = 11, align = "left", weight = 400, colour = "ink", halo = true, turn = 0 } = how;
  context.save();
  context.translate(x, y);
  if (turn) context.rotate(turn);
  setFont(context, state, px, weight);
  context.textAlign = align;
  context.textBaseline = "middle";
  context.setLineDash([]);
  if (halo) {
    context.lineJoin = "round";
    context.lineWidth = 4;
    context.strokeStyle = state.colours.paper;
    context.strokeText(text, 0, 0);
  }
  context.fillStyle = state.colours[colour];
  context.fillText(text, 0, 0);
  context.restore();
}

/** Lines of 45 degrees within an outline. */
function hatch(context, state, points, gap = 5) {
  const xs = points.map((point) => point[0]), ys = points.map((point) => point[1]);
  const [left, right] = [Math.min(...xs), Math.max(...xs)];
  const [top, bottom] = [Math.min(...ys), Math.max(...ys)];
  context.save();
  trace(context, points, true);
  context.clip();
  use(context, state, "thin");
  context.beginPath();
  const first = Math.floor((left - (bottom - top)) / gap) * gap;
  for (let x = first; x < right; x += gap) {
    context.moveTo(x, bottom);
    context.lineTo(x + bottom - top, top);
  }
  context.stroke();
  context.restore();
}

/**
 * A dimension line beside two places, level or upright: `off` is where it runs, a y where the
 * places are measured across, `{x}` where they are measured upwards. Returns the ends of the line.
 */
function dimension(context, state, from, to, off, text) {
  const upright = off.x !== undefined;
  const on = (p) => (upright ? [off.x, p[1]] : [p[0], off.y]);
  const [a, b] = [on(from), on(to)];
  for (const [p, q] of [[from, a], [to, b]]) {
    const way = Math.sign(upright ? q[0] - p[0] : q[1] - p[1]) || 1;
    const gap = 3 * way, over = 4 * way;
    line(context, state, upright ? [[p[0] + gap, p[1]], [q[0] + over, q[1]]]
      : [[p[0], p[1] + gap], [q[0], q[1] + over]], "thin", false);
  }
  const length = Math.hypot(b[0] - a[0], b[1] - a[1]);
  const middle = [(a[0] + b[0]) / 2, (a[1] + b[1]) / 2];
  if (length > 2.5 * ARROW) {
    arrow(context, state, middle, a, "thin", ARROW);
    arrow(context, state, middle, b, "thin", ARROW);
  } else {
    const way = upright ? [0, Math.sign(b[1] - a[1]) || 1] : [Math.sign(b[0] - a[0]) || 1, 0];
    for (const [end, sign] of [[a, -1], [b, 1]]) {
      const out = [end[0] + way[0] * 16 * sign, end[1] + way[1] * 16 * sign];
      arrow(context, state, out, end, "thin", ARROW);
    }
  }
  // ISO 129: above the line, read from below or from the right; beside a short one.
  const room = length > widthOf(context, state, text, 11) + 6 ? 0 : length / 2 + 20 + widthOf(context, state, text, 11) / 2;
  const at = upright ? [middle[0] - 8, middle[1] - room] : [middle[0] + room, middle[1] - 8];
  letters(context, state, text, ...at, { align: "center", turn: upright ? -Math.PI / 2 : 0 });
  return [a, b];
}
