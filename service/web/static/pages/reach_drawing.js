// The drawing of the reach page: envelope, places, the arm at a solution, the way it comes.
// Idea: a section through axis 1, turned to the bearing of the chosen place, beside a plan at the
// same scale that tells by A-A where it is cut; other places are turned into the section about
// axis 1. Left out: envelopes, postures, places in the base: all answered by the interface.

import { drawArm } from "./arm_drawing.js";
import { scaleBar } from "./marks.js";
import { unitsOf } from "./numbers.js";
import { pen } from "./pen.js";
import { column, cross, dot, MM_IN, moved, placed, scaleWithRoom, unit } from "./projection.js";
import { SIGNS } from "./reach_list.js";
import { onTheme } from "./shell.js";
import { say, WORDS } from "./words.js";

const MARGIN = 14, TITLE = 26, GAP = 34;
const FOOT = 34;            // Scale bar below the views.
const STACKED = 620;        // Narrower paper has the views one above the other.
const ENOUGH = 100;         // Places tell the paper's room where nothing else does.
const FAR = 0.6;            // Places farther off the envelope than this share of it stand at the edge.

/**
 * @typedef {{envelope: object|null, outline: object|null, before: object|null, units: string,
 *   places: {at: number[], verdict: string}[], chosen: {at: number[], verdict: string, name: string}|null,
 *   way: {from: number[], to: number[], isBroken: boolean}|null, nearest: number[]|null,
 *   missing: string, toolName: string}} Picture
 *   all in the base: `outline` at the solution, `before` where the approach begins.
 */

/** Return what draws pictures on a canvas, anew when paper or room change. */
export function reachDrawing(canvas) {
  const paper = { canvas, pen: pen(canvas), picture: null };
  const again = () => paper.picture && draw(paper);
  new ResizeObserver(again).observe(canvas);
  const tinted = () => {
    paper.pen.tint();
    again();
  };
  onTheme(tinted);
  for (const event of ["beforeprint", "afterprint"]) addEventListener(event, tinted);
  matchMedia("print").addEventListener("change", tinted);
  return (picture) => {
    paper.picture = picture;
    draw(paper);
  };
}

function draw({ pen: drawn, picture, canvas }) {
  drawn.begin();
  const [width, height] = drawn.size();
  if (!width || !height) return;
  const views = viewsOf(picture);
  const isStacked = width < STACKED;
  const sizes = views.map((view) => extent(view, picture));
  const scale = scaleFor(sizes, width, height, isStacked, picture.units);
  let [x, y] = [MARGIN, MARGIN + TITLE];
  const free = isStacked ? 0 : (width - 2 * MARGIN - GAP - sizes[0].wide * scale.px - sizes[1].wide * scale.px) / 2;
  views.forEach((view, i) => {
    const size = sizes[i];
    const [w, h] = [size.wide * scale.px, size.high * scale.px];
    const left = isStacked ? (width - w) / 2 : x + free;
    const put = placed(view, scale.px, [0, 0, 0], left - size.left * scale.px, y + size.top * scale.px);
    paintView(drawn, put, view, picture, { left, top: y, right: left + w, bottom: y + h });
    if (isStacked) y += h + TITLE + GAP / 2;
    else x = left + w + GAP - free;
  });
  const unitName = unitsOf(picture.units).length;
  scaleBar(drawn, MARGIN + 6, height - 12, scale.px, unitName, Math.min(width / 3, 200));
  drawn.letters(say(WORDS.reach.drawing.scale, { scale: scale.words }), width - MARGIN, height - 12,
    { align: "right", px: 12 });
  canvas.dataset.scale = scale.words;
}

function scaleFor(sizes, width, height, isStacked, units) {
  const [a, b] = sizes;
  const room = {
    x: 0, y: 0, width: width - 2 * MARGIN - (isStacked ? 0 : GAP), height: height - 2 * MARGIN - FOOT - TITLE };
  if (isStacked) room.height -= TITLE + GAP / 2;
  const wide = isStacked ? Math.max(a.wide, b.wide) : a.wide + b.wide;
  const high = isStacked ? a.high + b.high : Math.max(a.high, b.high);
  return scaleWithRoom(wide, high, room, MM_IN[unitsOf(units).length]);
}

/** The two ways of looking: along the normal of the section's plane, and from above. */
function viewsOf({ envelope, chosen, outline }) {
  const reach = envelope?.travel ?? envelope?.working_travel;
  const axis = envelope?.axis ?? (envelope ? null : { point: [0, 0, 0], direction: [0, 0, 1] });
  const [first, second] = reach?.section.directions ?? [[1, 0, 0], [0, 0, 1]];
  const [right, up] = reach?.plan.directions ?? [[1, 0, 0], [0, 1, 0]];
  const plan = { kind: "plan", across: right, up, toward: cross(right, up) };
  if (!axis || (reach && reach.section.kind !== "section")) {
    return [{ kind: "side", across: first, up: second, toward: cross(first, second) }, plan];
  }
  const tool = outline ? column(outline.tool, 3) : null;
  const across = bearing(axis, chosen?.at ?? tool) ?? first;
  const section = { kind: "section", across, up: axis.direction, toward: cross(across, axis.direction), axis };
  return [section, { ...plan, axis, cut: across }];
}

/** The direction from axis 1 to a place, square to the axis; null for a place on the axis. */
function bearing({ point, direction }, place) {
  if (!place) return null;
  const off = moved(place, point, -1);
  const level = moved(off, direction, -dot(off, direction));
  return Math.hypot(...level) > 1e-9 * Math.hypot(...off, 1) ? unit(level) : null;
}

/** A place as the view shows it: turned about axis 1 into the section, else as it stands. */
function shown(view, place) {
  if (view.kind !== "section") return place;
  const { point, direction } = view.axis;
  const off = moved(place, point, -1), height = dot(off, direction);
  const radius = Math.hypot(...moved(off, direction, -height));
  return moved(moved(point, view.across, radius), direction, height);
}

/** The curves of a view in the base. */
function curves(view, reach) {
  const flat = reach?.[view.kind === "plan" ? "plan" : "section"];
  const origin = view.kind === "section" ? view.axis.point : [0, 0, 0];
  return (flat?.curves ?? []).map(({ outer, points }) => ({
    outer, points: points.map(([a, b]) => moved(moved(origin, view.across, a), view.up, b)),
  }));
}

function extent(view, { envelope, outline, before, places, chosen }) {
  const firm = curves(view, envelope?.travel ?? envelope?.working_travel).flatMap((curve) => curve.points);
  for (const one of [outline, before]) firm.push(...(one?.line ?? []));
  if (!firm.length) firm.push([0, 0, 0], ...places.slice(0, ENOUGH).map((place) => place.at));
  const flat = (point) => [dot(view.across, point), dot(view.up, point)];
  const box = boxed(firm.map(flat));
  const most = FAR * Math.max(box.right - box.left, box.top - box.bottom);
  const near = [...places, ...(chosen ? [chosen] : [])].map(({ at }) => flat(shown(view, at)))
    .filter(([a, b]) => a > box.left - most && a < box.right + most && b > box.bottom - most && b < box.top + most);
  const all = boxed([[box.left, box.bottom], [box.right, box.top], ...near]);
  const pad = 0.03 * Math.max(all.right - all.left, all.top - all.bottom, 1e-6);
  const [left, right, bottom, top] = [all.left - pad, all.right + pad, all.bottom - pad, all.top + pad];
  return { left, right, bottom, top, wide: right - left, high: top - bottom };
}

function boxed(flat) {
  const box = { left: Infinity, right: -Infinity, bottom: Infinity, top: -Infinity };
  for (const [a, b] of flat) {
    [box.left, box.right] = [Math.min(box.left, a), Math.max(box.right, a)];
    [box.bottom, box.top] = [Math.min(box.bottom, b), Math.max(box.top, b)];
  }
  return box;
}

function paintView(drawn, put, view, picture, frame) {
  const { envelope, outline, before, places, chosen, toolName } = picture;
  const words = WORDS.reach.drawing;
  drawn.letters(words[view.kind], frame.left, frame.top - TITLE / 2, { px: 13, weight: 600 });
  region(drawn, put, curves(view, envelope?.travel ?? envelope?.working_travel), "medium");
  if (envelope?.travel) for (const { points } of curves(view, envelope.working_travel)) drawn.closed(
    points.map(put), "dashed");
  if (view.axis) axisLine(drawn, put, view, frame);
  for (const { at, verdict } of places) mark(drawn, put(shown(view, at)), verdict, 12, frame);
  if (before) drawn.line(before.line.map(put), "dashed");
  if (outline) drawArm(drawn, put, { outline, toolName: view.kind === "plan" ? "" : toolName },
    { size: thickness(put, outline), axes: 20 });
  way(drawn, put, picture);
  if (chosen) chosenPlace(drawn, put, view, picture, frame);
}

/** Bars as thick as the drawing bears: a small arm stays thin. */
function thickness(put, { line }) {
  const points = line.map(put);
  const long = points.slice(1).reduce((sum, point, i) =>
    sum + Math.hypot(point[0] - points[i][0], point[1] - points[i][1]), 0);
  return Math.min(Math.max(long * 0.018, 2.5), 9);
}

function region(drawn, put, found, kind) {
  const tone = drawn.colour("wash");
  for (const isOuter of [true, false]) {
    for (const { outer, points } of found) {
      if (outer === isOuter) drawn.closed(points.map(put), kind, isOuter && tone !== "wash" ? tone : "paper");
    }
  }
}

/** Axis 1 in the section; in the plan where the section is cut, with arrows the way it is seen. */
function axisLine(drawn, put, view, { left, top, right, bottom }) {
  const at = put(view.axis.point);
  if (view.kind === "section") return drawn.line([[at[0], top], [at[0], bottom]], "chain");
  const [dx, dy] = [dot(view.cut, view.across), -dot(view.cut, view.up)];
  const long = Math.max(right - left, bottom - top) / 2;
  const end = [at[0] + dx * long, at[1] + dy * long], begin = [at[0] - dx * 24, at[1] - dy * 24];
  drawn.line([begin, end], "chain");
  for (const point of [begin, end]) {
    const tip = [point[0] + dy * 16, point[1] - dx * 16];
    drawn.arrow(point, tip, "thick", 8);
    drawn.letters("A", tip[0] + dy * 9, tip[1] - dx * 9, { px: 13, weight: 600, align: "center" });
  }
}

/** The sign of a verdict at a place; at the edge of its view where it lies beyond. */
function mark(drawn, [x, y], verdict, size, frame, kind = 1.2) {
  const path = SIGNS[verdict] ?? "M10 7v6M7 10h6";
  const [cx, cy] = [Math.min(Math.max(x, frame.left), frame.right), Math.min(Math.max(y, frame.top), frame.bottom)];
  const { context } = drawn;
  context.save();
  context.translate(cx - size / 2, cy - size / 2);
  context.scale(size / 20, size / 20);
  context.setLineDash([]);
  for (const [width, colour] of [[kind * 4.5, "paper"], [kind * 1.6, "ink"]]) {
    context.lineWidth = width * (12 / size + 0.4);
    context.strokeStyle = drawn.colour(colour);
    context.stroke(new Path2D(path));
  }
  context.restore();
  return cx !== x || cy !== y;
}

function way(drawn, put, { way: found }) {
  if (!found) return;
  const [from, to] = [put(found.from), put(found.to)];
  drawn.arrow(from, to, found.isBroken ? "heavyDashed" : "thick", 11);
  if (!found.isBroken) return drawn.circle(from[0], from[1], 3, "medium", "paper");
  for (const s of [1, -1]) drawn.line([[from[0] - 6, from[1] - 6 * s], [from[0] + 6, from[1] + 6 * s]], "thick");
}

function chosenPlace(drawn, put, view, { chosen, nearest, missing }, frame) {
  const at = put(shown(view, chosen.at));
  if (nearest) {
    const near = put(shown(view, nearest));
    drawn.line([at, near], "thin");
    drawn.circle(near[0], near[1], 4, "medium", "paper");
    const words = { px: 12, align: near[0] > (frame.left + frame.right) / 2 ? "right" : "left" };
    drawn.letters(missing, near[0] + (words.align === "right" ? -9 : 9), near[1] + 13, words);
  }
  const isBeyond = mark(drawn, at, chosen.verdict, 18, frame, 1.5);
  const name = isBeyond ? say(WORDS.reach.drawing.beyond, { name: chosen.name }) : chosen.name;
  const isRight = at[0] > (frame.left + frame.right) / 2;
  const x = Math.min(Math.max(at[0], frame.left), frame.right) + (isRight ? -14 : 14);
  const y = Math.min(Math.max(at[1], frame.top), frame.bottom) - 12;
  drawn.letters(name, x, y, { px: 13, weight: 600, align: isRight ? "right" : "left" });
}
