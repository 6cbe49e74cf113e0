// The bodies of a kinematic drawing: bars, drums for joints that turn, sleeves for those that slide.
// Idea: axes and distances are the arm's, to scale; thicknesses are the drawing's, in pixels, for no
// table knows them. Each body says how near it is, so that what lies in front is drawn last.
// Left out: hidden lines between bodies that cut through each other.

import { column, cross, dot, moved, unit } from "./projection.js";

/** @typedef {{near: number, draw: (pen: object) => void}} Body */

/** A bar along a line of the arm; `r` in pixels. @returns {Body} */
function bar(put, line, r, kind = "thick") {
  const points = line.map(put);
  const near = points.reduce((sum, point) => sum + point[2], 0) / points.length;
  return { near, draw: (pen) => pen.tube(points, r, kind) };
}

/** How a direction lies on the paper: right, down, to the viewer. */
const onPaper = ({ view }, direction) =>
  [dot(direction, view.across), -dot(direction, view.up), dot(direction, view.toward)];

/**
 * A drum about an axis; `r` and half its length `h` in pixels, with its centre lines.
 * @returns {Body}
 */
function drum(put, centre, axis, r, h, kind = "thick", bore = 0.45) {
  const [x, y, depth] = put(centre);
  let [ax, ay, az] = onPaper(put, axis);
  if (az < 0) [ax, ay, az] = [-ax, -ay, -az];
  const flat = Math.hypot(ax, ay);
  const turn = flat > 1e-6 ? Math.atan2(ay, ax) : 0;
  const side = flat > 1e-6 ? [(-ay / flat) * r, (ax / flat) * r] : [0, r];
  const near = [x + ax * h, y + ay * h], far = [x - ax * h, y - ay * h];
  const draw = (pen) => {
    const cap = (at, size, line, fill) => pen.ellipse(at[0], at[1], size * az, size, turn, line, fill);
    cap(far, r, kind, "paper");
    if (flat > 1e-3) {
      const edge = (at, sign) => [at[0] + side[0] * sign, at[1] + side[1] * sign];
      pen.closed([edge(near, 1), edge(far, 1), edge(far, -1), edge(near, -1)], null, "paper");
      for (const sign of [1, -1]) pen.line([edge(near, sign), edge(far, sign)], kind);
    }
    cap(near, r, kind, "paper");
    if (bore && az > 0.25) cap(near, r * bore, "thin");
    centreLines(pen, near, far, [ax, ay, az, flat], r);
  };
  return { near: depth + (h * az + 1) / put.px, draw };
}

function centreLines(pen, near, far, [ax, ay, az, flat], r) {
  const over = 7;
  if (flat > 0.15) {
    const out = over + (1 - flat) * r;
    pen.line([[far[0] - ax * out, far[1] - ay * out], [near[0] + ax * out, near[1] + ay * out]],
      "chain");
  }
  if (az > 0.96) {
    const reach = r + over;
    pen.line([[near[0] - reach, near[1]], [near[0] + reach, near[1]]], "chain");
    pen.line([[near[0], near[1] - reach], [near[0], near[1] + reach]], "chain");
  }
}

/**
 * A block about a place, its edges along `w` and two directions across it; halves in pixels.
 * @returns {Body}
 */
function block(put, centre, w, across, halves, kind = "thick") {
  const [hu, hv, hw] = halves.map((half) => half / put.px);
  const v = unit(cross(w, across)), u = unit(cross(v, w));
  const faces = [[u, hu, v, hv, w, hw], [v, hv, w, hw, u, hu], [w, hw, u, hu, v, hv]];
  const shown = [];
  for (const [normal, off, a, ha, b, hb] of faces) {
    const facing = dot(normal, put.view.toward);
    if (Math.abs(facing) < 1e-3) continue;
    const middle = moved(centre, normal, off * Math.sign(facing));
    shown.push([[1, 1], [1, -1], [-1, -1], [-1, 1]].map(([i, j]) =>
      put(moved(moved(middle, a, i * ha), b, j * hb))));
  }
  const depth = put(centre)[2];
  return {
    near: depth + hw * Math.abs(dot(w, put.view.toward)) + 1 / put.px,
    draw: (pen) => shown.forEach((face) => pen.closed(face, kind, "paper")),
  };
}

/** A direction across another: as upright as it can be. */
function acrossOf(direction) {
  const up = Math.abs(direction[2]) < 0.9 ? [0, 0, 1] : [1, 0, 0];
  return unit(cross(direction, up));
}

/**
 * The bodies of an arm by its outline; `size` is the pixel radius of its thickest bar.
 * @returns {Body[]}
 */
export function bodiesOf(put, outline, size, kind = "thick") {
  const { axes, line } = outline, count = axes.length;
  const thickness = (i) => size * (1 - (0.5 * i) / Math.max(count, 1));
  const bodies = [footOf(put, outline.base, size, kind)];
  axes.forEach((axis, i) => {
    const r = thickness(i);
    const link = [line[2 * i + 1], line[2 * i + 2], line[2 * i + 3]];
    if (i === 0) bodies.push(bar(put, [line[0], line[1]], r, kind));
    bodies.push(bar(put, link, axis.slides ? r * 0.6 : r * 0.8, kind));
    bodies.push(axis.slides ? sleeve(put, axis, r, kind) : turning(put, axis, r, kind));
  });
  const flange = column(outline.flange, 3), tool = column(outline.tool, 3);
  const thin = thickness(count);
  bodies.push(bar(put, [flange, tool], Math.max(thin * 0.3, 1.2), kind));
  bodies.push(drum(put, flange, column(outline.flange, 2), thin * 1.25, thin * 0.3, kind, 0));
  return bodies;
}

function turning(put, axis, r, kind) {
  const span = axis.to.map((one, i) => one - axis.from[i]);
  const long = Math.hypot(...span) * put.px > 5 * r;
  const centre = long ? moved(axis.from, span, 0.5) : axis.from;
  return drum(put, centre, axis.direction, r * (long ? 1.25 : 1.5), r * (long ? 0.9 : 1.3), kind);
}

function sleeve(put, axis, r, kind) {
  const across = acrossOf(axis.direction);
  return block(put, axis.to, axis.direction, across, [r * 1.5, r * 1.5, r * 2.2], kind);
}

function footOf(put, base, size, kind) {
  const [x, z, origin] = [0, 2, 3].map((j) => column(base, j));
  const half = size * 0.55;
  const foot = block(put, moved(origin, z, -half / put.px), z, x, [size * 2.3, size * 2.3, half], kind);
  return { ...foot, near: foot.near - (2 * half) / put.px };
}
