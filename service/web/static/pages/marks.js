// What is written round an arm: axes of a frame, balloons, what motion is lost, ground, scale bar.
// Idea: an axis is told by its letter and its line (x long dashes, y dash and dot, z solid), one
// that points at the viewer by a dot in a circle, away by a cross; labels look for a free place.
// Left out: bodies (solids.js).

import { column, cross, dot, moved, roundLength, unit } from "./projection.js";

const LINE_OF = { x: "long", y: "dashDot", z: "medium" };

/** Draw the axes of a frame, a 4 x 4 matrix, `length` pixels long; `name` goes to the labels. */
export function triad(pen, put, matrix, length, labels, title) {
  const origin = column(matrix, 3), from = put(origin);
  pen.circle(from[0], from[1], 2, "thin", "ink");
  const letter = (text, x, y) => {
    pen.letters(text, x, y, { px: 11, align: "center" });
    labels.keep(x, y, 6);
  };
  ["x", "y", "z"].forEach((name, j) => {
    const axis = column(matrix, j);
    const to = put(moved(origin, axis, length / put.px));
    const [dx, dy] = [to[0] - from[0], to[1] - from[1]];
    const shown = Math.hypot(dx, dy);
    if (shown < 7) {
      endOn(pen, from, dot(axis, put.view.toward) > 0);
      labels.keep(...from, 7);
      letter(name, from[0] - 11, from[1] + 10);
      return;
    }
    pen.arrow(from, to, LINE_OF[name], 7);
    labels.keepLine([from, to], 4);
    const out = 8 / shown;
    letter(name, to[0] + dx * out, to[1] + dy * out);
  });
  if (title) labels.add(title, from, { gap: 12 });
}

function endOn(pen, [x, y], nearer) {
  pen.circle(x, y, 5, "medium", "paper");
  if (nearer) pen.circle(x, y, 1.6, null, "ink");
  else for (const s of [1, -1]) pen.line([[x - 3.5, y - 3.5 * s], [x + 3.5, y + 3.5 * s]], "thin");
}

/**
 * Draw what motion is lost: a hollow arrow both ways for a direction the tool cannot move in, an
 * arrow round the line it cannot turn about; dashed as long as it is only nearly lost.
 * @param {{linear: number[], angular: number[]}[]} lost unit twists
 */
export function lostMotion(pen, put, place, lost, isLost, length = 40) {
  const kind = isLost ? "thick" : "heavyDashed";
  const from = put(place);
  for (const { linear, angular } of lost) {
    const straight = Math.hypot(...linear), turning = Math.hypot(...angular);
    if (straight > 0.05) hollowArrow(pen, put, from, linear.map((p) => p / straight), length, kind);
    if (turning > 0.05) turnArrow(pen, put, place, angular.map((p) => p / turning), length, kind);
  }
}

function hollowArrow(pen, put, from, direction, length, kind) {
  const [x, y] = [dot(direction, put.view.across), -dot(direction, put.view.up)];
  const flat = Math.hypot(x, y);
  if (flat < 0.12) {
    pen.circle(from[0], from[1], 13, kind);
    endOn(pen, from, true);
    return;
  }
  const [c, s, reach] = [x / flat, y / flat, 44 + Math.max(length * flat, 22)];
  const at = (along, side) => [from[0] + c * along - s * side, from[1] + s * along + c * side];
  const half = [[42, 4], [reach - 13, 4], [reach - 13, 9], [reach, 0], [reach - 13, -9],
    [reach - 13, -4], [42, -4]];
  for (const sign of [1, -1]) {
    pen.closed(half.map(([a, b]) => at(a * sign, b)), kind, "paper");
  }
}

function turnArrow(pen, put, place, axis, length, kind) {
  const points = round(put, place, axis, length);
  pen.line(points, kind);
  pen.arrow(points.at(-3), points.at(-1), "thick", 11);
  pen.arrow(points.at(2), points[0], "thick", 11);
  centreLine(pen, put, place, axis, length);
}

/** Five sixths of a circle about an axis, right-handed. */
function round(put, place, axis, length) {
  const u = unitAcross(axis, Math.abs(axis[2]) < 0.8 ? [0, 0, 1] : [1, 0, 0]), v = cross(axis, u);
  const r = length / put.px;
  return Array.from({ length: 41 }, (_, step) => {
    const angle = (-150 + step * 7.5) * (Math.PI / 180);
    return put(moved(moved(place, u, r * Math.cos(angle)), v, r * Math.sin(angle)));
  });
}

function centreLine(pen, put, place, axis, length) {
  if (Math.abs(dot(axis, put.view.toward)) > 0.97) return;
  const reach = (length * 1.5) / put.px;
  pen.line([put(moved(place, axis, -reach)), put(moved(place, axis, reach))], "chain");
}

/**
 * Draw which way a joint's value rises: an arrow round its axis, or along it, with a plus at its head.
 * @param {{axis: {slides: boolean, from: number[], to: number[], direction: number[]}, sign: number}} what
 */
export function rising(pen, put, { axis, sign }, labels, length = 28) {
  const direction = axis.direction.map((part) => part * sign);
  const centre = axis.slides ? axis.to : moved(axis.from, moved(axis.to, axis.from, -1), 0.5);
  const points = axis.slides
    ? [0.4, 1.4].map((by) => put(moved(centre, direction, (by * length) / put.px)))
    : round(put, centre, direction, length);
  centreLine(pen, put, centre, direction, length);
  pen.line(points, "thick");
  pen.arrow(points.at(axis.slides ? 0 : -4), points.at(-1), "thick", 13);
  labels.keepLine(points, 4);
  labels.add("+", points.at(-1), { px: 18, weight: 700, gap: 4, from: 99 });
}

const unitAcross = (axis, helper) => unit(moved(helper, axis, -dot(axis, helper)));

/** Draw the ground under a foot: a line with hatching below, where it is seen from the side. */
export function ground(pen, put, base, size) {
  const [up, across] = [column(base, 2), column(base, 0)];
  const rise = -dot(up, put.view.up);
  if (Math.abs(rise) < 0.9 || Math.abs(dot(up, put.view.toward)) > 0.3) return;
  const flat = dot(across, put.view.across) || 1;
  const [x, y] = put(moved(column(base, 3), up, (-1.1 * size) / put.px));
  const half = size * 4 * Math.sign(flat), low = y - 7 * Math.sign(rise) * -1;
  pen.hatch([[x - half, y], [x + half, y], [x + half, low], [x - half, low]], 6);
  pen.line([[x - half, y], [x + half, y]], "medium");
}

/** Draw a bar that says how long a length of the arm is on this paper, whatever the screen. */
export function scaleBar(pen, x, y, px, unitName, most = 160) {
  const length = roundLength(most, px), end = x + length * px;
  const parts = [0, 0.2, 0.4, 0.6, 0.8, 1].map((share) => x + share * (end - x));
  for (let i = 0; i < 5; i++) {
    const [from, to] = [parts[i], parts[i + 1]];
    const corners = [[from, y - 3], [to, y - 3], [to, y + 3], [from, y + 3]];
    pen.closed(corners, "thin", i % 2 ? "paper" : "ink");
  }
  pen.letters("0", x, y - 11, { px: 10, align: "center" });
  const written = length.toLocaleString("en").replaceAll(",", "\u00a0");
  pen.letters(`${written} ${unitName}`, end, y - 11, { px: 10, align: "center" });
}

/** Draw the sign of first angle projection (ISO 5456-2): a cone from the side, and from its end. */
export function firstAngle(pen, x, y, s = 9) {
  const right = x + 2.2 * s;
  pen.closed([[x - s, y - s * 0.5], [x + s * 0.8, y - s], [x + s * 0.8, y + s], [x - s, y + s * 0.5]],
    "medium");
  for (const r of [s, s * 0.5]) pen.circle(right + s * 0.4, y, r, "medium");
  pen.line([[x - s - 4, y], [x + s * 0.8 + 4, y]], "chain");
  pen.line([[right - s * 0.6 - 4, y], [right + s * 1.4 + 4, y]], "chain");
  pen.line([[right + s * 0.4, y - s - 4], [right + s * 0.4, y + s + 4]], "chain");
}

/**
 * Return a collector of labels: each finds the place round its point where it covers least.
 * `keep` marks what labels should stay off.
 */
export function labelsOn(pen) {
  const wanted = [], taken = [];
  return {
    add: (text, at, how = {}) => wanted.push({ text, at, how }),
    keep: (x, y, r) => taken.push([x - r, y - r, x + r, y + r]),
    keepLine(points, r) {
      for (let i = 1; i < points.length; i++) {
        const [a, b] = [points[i - 1], points[i]];
        const steps = Math.min(Math.ceil(Math.hypot(b[0] - a[0], b[1] - a[1]) / (2 * r)), 60);
        for (let k = 0; k <= steps; k++) {
          const t = steps ? k / steps : 0;
          this.keep(a[0] + (b[0] - a[0]) * t, a[1] + (b[1] - a[1]) * t, r);
        }
      }
    },
    write: () => wanted.forEach((label) => writeLabel(pen, label, taken)),
  };
}

const covered = (a, b) =>
  Math.max(0, Math.min(a[2], b[2]) - Math.max(a[0], b[0])) *
  Math.max(0, Math.min(a[3], b[3]) - Math.max(a[1], b[1]));

function writeLabel(pen, { text, at, how }, taken) {
  const px = how.px ?? 11;
  const [width, height] = how.balloon ? [2 * how.balloon, 2 * how.balloon] : [pen.widthOf(text, px), px + 2];
  const [paperWidth, paperHeight] = pen.size();
  let best = null;
  for (const gap of [how.gap ?? 14, (how.gap ?? 14) * 1.8, (how.gap ?? 14) * 2.8]) {
    for (let turn = 0; turn < 16; turn++) {
      const angle = (turn * Math.PI) / 8 - Math.PI / 8;
      const x = at[0] + Math.cos(angle) * (gap + width / 2), y = at[1] + Math.sin(angle) * (gap + height / 2);
      const rect = [x - width / 2 - 2, y - height / 2 - 1, x + width / 2 + 2, y + height / 2 + 1];
      const outside = rect[0] < 2 || rect[1] < 2 || rect[2] > paperWidth - 2 || rect[3] > paperHeight - 2;
      const cost = taken.reduce((sum, one) => sum + covered(rect, one), 0) + gap * 0.6 + (outside ? 1e5 : 0);
      if (!best || cost < best.cost) best = { cost, x, y, rect };
    }
  }
  taken.push(best.rect);
  leader(pen, at, best, width, height, how);
  if (how.balloon) pen.circle(best.x, best.y, how.balloon, "thin", "paper");
  pen.letters(text, best.x, best.y, { px, align: "center", halo: !how.balloon, weight: how.weight ?? 400 });
}

function leader(pen, at, best, width, height, how) {
  const [dx, dy] = [best.x - at[0], best.y - at[1]];
  const far = Math.hypot(dx, dy) || 1;
  const edge = (half, part) => half / Math.max(Math.abs(part / far), 1e-6);
  const inside = how.balloon ?? Math.min(edge(width / 2, dx), edge(height / 2, dy));
  const end = 1 - inside / far, begin = (how.from ?? 3) / far;
  if (end <= begin + 2 / far) return;
  const on = (t) => [at[0] + dx * t, at[1] + dy * t];
  pen.line([on(begin), on(end)], "thin");
}
