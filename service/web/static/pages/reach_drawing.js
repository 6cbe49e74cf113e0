// The drawing of the reach page: envelope, places, the arm at a solution, the way it comes.
// Idea: a section through axis 1, turned to the bearing of the chosen place, beside a plan at the
// same scale that tells by A-A where it is cut; other places are turned into the section about
// axis 1. Left out: the ways of looking (reach_views.js); envelopes, postures, places in the base, which
// the interface answers.

import { drawArm } from "./arm_drawing.js";
import { labelsOn, scaleBar, triad } from "./marks.js";
import { unitsOf } from "./numbers.js";
import { pen } from "./pen.js";
import { column, dot, MM_IN, moved, placed, scaleWithRoom } from "./projection.js";
import { beyond, marks, NUMBERED, seenAt, stroke } from "./reach_signs.js";
import { curves, shown, viewsOf } from "./reach_views.js";
import { onTheme } from "./shell.js";
import { say, WORDS } from "./words.js";

const MARGIN = 10, TITLE = 24, GAP = 12;
const AIR = 34;             // Round what a view shows: for letters, arrows and the ground's hatching.
const FOOT = 34;            // Scale bar below the views.
const ENOUGH = 100;         // Places tell the paper's room where nothing else does.
const FAR = 0.25;           // Places farther off the envelope than this share of it stand at the edge,
const FAR_CHOSEN = 0.8;     // the chosen one if it is farther than this.
const TITLE_PX = 13, BOLD = 1.12;
const AXES = 78;            // Beside a title: which way the axes of the base point.
const FINE = 4;             // Pixels of a drawing for print, to one of the screen.
const SHEET = ["180mm", "105mm"]; // A4 and Letter have room for it: the scale holds on both.
const PRINTED = {
  "--ink": "#000", "--paper": "#fff", "--quiet": "#333", "--faint": "#ccc", "--accent": "#000" };
/** Drawn by where there is nothing yet, mm: a man's reach. */
const SMALLEST = 1000;

/**
 * @typedef {{at: number[], verdict: string, number: number, name?: string}} Marked
 * @typedef {{envelope: object|null, outline: object|null, before: object|null, units: string,
 *   places: Marked[], chosen: Marked|null, way: {from: number[], to: number[], isBroken: boolean}|null,
 *   nearest: number[]|null, missing: string, slides: boolean, vertical: number[]}} Picture
 *   all in the base, the vertical too; slides: row 1 does, so that there is no axis 1; `outline` at the
 *   solution, `before` where the approach begins.
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
  const printed = (isPrinted) => () => {
    forPrint(canvas, isPrinted);
    tinted();
  };
  addEventListener("beforeprint", printed(true));
  addEventListener("afterprint", printed(false));
  return (picture) => {
    paper.picture = picture;
    draw(paper);
  };
}

/** The page's rules for print hold only while it is laid out for that: too late for a canvas. */
function forPrint(canvas, isPrinted) {
  [canvas.style.width, canvas.style.height] = isPrinted ? SHEET : ["", ""];
  for (const [name, value] of Object.entries(PRINTED)) canvas.style.setProperty(name, isPrinted ? value : "");
  canvas.dataset.ratio = isPrinted ? FINE : "";
}

function draw({ pen: drawn, picture, canvas }) {
  drawn.begin();
  const [width, height] = drawn.size();
  if (!width || !height) return;
  const views = viewsOf(picture).map((view) => {
    const words = WORDS.reach.drawing[view.title], beside = view.kind === "section" ? 0 : AXES;
    return { view, words, size: extent(view, picture), least: drawn.widthOf(words, TITLE_PX) * BOLD + beside };
  });
  const { scale, isStacked } = laidOut(views, width, height, picture.units);
  const areBeyond = frames(views, scale.px, width, height, isStacked).map((frame, i) => {
    const { view, words, size } = views[i];
    const left = (frame.left + frame.right - size.wide * scale.px) / 2;
    const [x, y] = [left - size.left * scale.px, frame.top + AIR + size.top * scale.px];
    const put = placed(view, scale.px, [0, 0, 0], x, y);
    drawn.letters(words, frame.left, frame.top - TITLE / 2, { px: TITLE_PX, weight: 600 });
    return paintView(drawn, put, view, picture, frame);
  });
  const unitName = unitsOf(picture.units).length;
  scaleBar(drawn, MARGIN + 10, height - 12, scale.px, unitName, Math.min(width / 3, 200));
  drawn.letters(say(WORDS.reach.drawing.scale, { scale: scale.words }), width - MARGIN - 4, height - 12,
    { align: "right", px: 12 });
  Object.assign(canvas.dataset, { scale: scale.words, beyond: areBeyond.some(Boolean) ? "yes" : "" });
}

/** Side by side or one above the other: as the arm is drawn larger. */
function laidOut(views, width, height, units) {
  const sizes = views.map((one) => one.size);
  const sum = (key) => sizes[0][key] + sizes[1][key];
  const most = (key) => Math.max(sizes[0][key], sizes[1][key]);
  const free = [width - 2 * MARGIN - 2 * AIR, height - 2 * MARGIN - FOOT - TITLE - 2 * AIR];
  const scaled = (wide, high, [across, down]) => {
    const room = { x: 0, y: 0, width: Math.max(across, 9), height: Math.max(down, 9) };
    return scaleWithRoom(wide, high, room, MM_IN[unitsOf(units).length]);
  };
  const across = free[0] - 2 * AIR - GAP;
  const beside = views.reduce((found, { least }, i) => {
    // Beside a title that is wider than its view the other has less room.
    if (least < sizes[i].wide * found.px + 2 * AIR) return found;
    const other = scaled(sizes[1 - i].wide, most("high"), [across + 2 * AIR - least, free[1]]);
    return other.px < found.px ? other : found;
  }, scaled(sum("wide"), most("high"), [across, free[1]]));
  const below = scaled(most("wide"), sum("high"), [free[0], free[1] - 2 * AIR - TITLE]);
  const isWide = views[0].least + views[1].least + GAP < free[0] && beside.px >= below.px;
  return isWide ? { scale: beside, isStacked: false } : { scale: below, isStacked: true };
}

/** The room of each view, in the middle of the paper; a title is never wider than its view. */
function frames(views, px, width, height, isStacked) {
  const boxes = views.map(({ size, least }) => ({
    wide: Math.max(size.wide * px + 2 * AIR, least), high: size.high * px + 2 * AIR }));
  const titles = isStacked ? 2 * TITLE : TITLE;
  const [wide, high] = [boxes[0].wide + boxes[1].wide + GAP, boxes[0].high + boxes[1].high];
  const tall = isStacked ? high : Math.max(boxes[0].high, boxes[1].high);
  let x = (width - wide) / 2, y = MARGIN + TITLE + Math.max((height - MARGIN - FOOT - titles - tall) / 2, 0);
  return boxes.map((box) => {
    const left = isStacked ? (width - box.wide) / 2 : x;
    const top = isStacked ? y : y + (tall - box.high) / 2;
    x += box.wide + GAP;
    y += isStacked ? box.high + TITLE : 0;
    return { left, top, right: left + box.wide, bottom: top + box.high };
  });
}

function extent(view, { envelope, outline, before, places, chosen, units }) {
  const firm = curves(view, envelope?.travel ?? envelope?.working_travel).flat();
  for (const one of [outline, before]) firm.push(...(one?.line ?? []));
  const flat = (point) => [dot(view.across, point), dot(view.up, point)];
  if (firm.length) firm.push([0, 0, 0]);
  else {
    const seen = chosen ? [...places.slice(0, ENOUGH), chosen] : places.slice(0, ENOUGH);
    const half = SMALLEST / MM_IN[unitsOf(units).length];
    firm.push([0, 0, 0], moved([0, 0, 0], view.across, half), moved([0, 0, 0], view.up, half),
      ...seen.map((place) => shown(view, place.at)));
  }
  const box = boxed(firm.map(flat));
  const size = Math.max(box.right - box.left, box.top - box.bottom);
  const isNear = ([a, b], most) =>
    a > box.left - most && a < box.right + most && b > box.bottom - most && b < box.top + most;
  const those = (some, most) =>
    some.map(({ at }) => flat(shown(view, at))).filter((one) => isNear(one, most));
  const near = [...those(places, FAR * size), ...those(chosen ? [chosen] : [], FAR_CHOSEN * size)];
  const all = boxed([[box.left, box.bottom], [box.right, box.top], ...near]);
  return { ...all, wide: all.right - all.left, high: all.top - all.bottom };
}

function boxed(flat) {
  const box = { left: Infinity, right: -Infinity, bottom: Infinity, top: -Infinity };
  for (const [a, b] of flat) {
    [box.left, box.right] = [Math.min(box.left, a), Math.max(box.right, a)];
    [box.bottom, box.top] = [Math.min(box.bottom, b), Math.max(box.top, b)];
  }
  return box;
}

/** Return whether there is a place beyond the view. */
function paintView(drawn, put, view, picture, frame) {
  const { envelope, outline, before, places, chosen } = picture;
  const outlined = (reach, kind) => {
    for (const points of curves(view, reach)) drawn.closed(points.map(put), kind);
  };
  outlined(envelope?.travel ?? envelope?.working_travel, "medium");
  if (envelope?.travel) outlined(envelope.working_travel, "dashed");
  const labels = labelsOn(drawn);
  if (view.axis) axisLine(drawn, put, view, frame, labels);
  baseMark(drawn, put, view, outline, labels, frame);
  if (before) drawn.line(before.line.map(put), "dashed");
  if (outline) {
    drawArm(drawn, put, { outline }, { size: thickness(put, outline), axes: 20 });
    labels.keepLine(outline.line.map(put), 10);
    // The letters of the tool's axes stand where `drawArm` puts them, behind their arrows.
    const point = column(outline.tool, 3);
    const tips = [0, 1, 2].map((j) => put(moved(point, column(outline.tool, j), 26 / put.px)));
    for (const tip of tips) labels.keepLine([put(point), tip], 7);
  }
  const signs = places.map(({ at, verdict }) => ({ verdict, ...seenAt(put(shown(view, at)), frame) }));
  const isNumbered = places.length <= NUMBERED;
  marks(drawn, signs, isNumbered);
  const far = signs.filter(({ way }) => way);
  for (const one of far.slice(0, NUMBERED)) beyond(drawn, labels, one);
  if (isNumbered) for (const { on } of signs) labels.keep(...on, 6);
  way(drawn, put, picture);
  const isBeyond = chosen && chosenPlace(drawn, put, view, picture, frame, labels);
  if (isNumbered) places.forEach(({ number }, i) => {
    labels.add(String(number), signs[i].on, { px: 10, gap: 8, from: 99 });
  });
  labels.write();
  return isBeyond || far.length > 0;
}

/** The base where no arm stands on it, and beside the title which way its axes point. */
function baseMark(drawn, put, view, outline, labels, { left, top }) {
  const at = put([0, 0, 0]);
  if (!outline) {
    drawn.circle(at[0], at[1], 3.5, "medium", "paper");
    labels.add(WORDS.reach.drawing.base, at, { gap: 8, from: 99 });
  }
  const beside = left + drawn.widthOf(WORDS.reach.drawing[view.title], TITLE_PX) * BOLD + 40;
  labels.keepLine([[left, top - TITLE / 2], [beside, top - TITLE / 2]], 9);
  if (view.kind === "section") return;
  const corner = placed(view, put.px, [0, 0, 0], beside, top - 4);
  triad(drawn, corner, [[1, 0, 0, 0], [0, 1, 0, 0], [0, 0, 1, 0], [0, 0, 0, 1]], 18, labels);
}

/** Bars as thick as the drawing bears: a small arm stays thin. */
function thickness(put, { line }) {
  const points = line.map(put);
  const long = points.slice(1).reduce((sum, point, i) =>
    sum + Math.hypot(point[0] - points[i][0], point[1] - points[i][1]), 0);
  return Math.min(Math.max(long * 0.018, 2.5), 9);
}

/** Axis 1 in the section; in the plan where the section is cut, with arrows the way it is seen. */
function axisLine(drawn, put, view, { left, top, right, bottom }, labels) {
  const at = put(view.axis.point);
  if (view.kind === "section") {
    const isLevel = Math.abs(dot(view.axis.direction, view.across)) > 0.5;
    const ends = isLevel ? [[left + 4, at[1]], [right - 4, at[1]]] : [[at[0], top + 4], [at[0], bottom - 4]];
    return drawn.line(ends, "chain");
  }
  const onPaper = (way) => [dot(way, view.across), -dot(way, view.up)];
  const [dx, dy] = onPaper(view.cut), [sx, sy] = onPaper(view.looks);
  // As far as its own letter has room beside the view.
  const room = (from, way, low, high) => (way > 0 ? high - from : from - low) / Math.max(Math.abs(way), 1e-9);
  const long = Math.max(Math.min(room(at[0], dx, left, right), room(at[1], dy, top, bottom)) - 14, 30);
  const end = [at[0] + dx * long, at[1] + dy * long], begin = [at[0] - dx * 24, at[1] - dy * 24];
  drawn.line([begin, end], "chain");
  for (const point of [begin, end]) {
    const tip = [point[0] + sx * 16, point[1] + sy * 16];
    drawn.arrow(point, tip, "thick", 8);
    labels.keepLine([point, [tip[0] + sx * 12, tip[1] + sy * 12]], 7);
    drawn.letters("A", tip[0] + sx * 9, tip[1] + sy * 9, { px: 13, weight: 600, align: "center" });
  }
}

function way(drawn, put, { way: found }) {
  if (!found) return;
  const [from, to] = [put(found.from), put(found.to)];
  drawn.arrow(from, to, found.isBroken ? "heavyDashed" : "thick", 11);
  if (!found.isBroken) return drawn.circle(from[0], from[1], 3, "medium", "paper");
  const [x, y] = from;
  for (const s of [6, -6]) drawn.line([[x - 6, y - s], [x + 6, y + s]], "thick");
}

function chosenPlace(drawn, put, view, { chosen, nearest, missing }, frame, labels) {
  const seen = seenAt(put(shown(view, chosen.at)), frame), edge = seen.on;
  if (nearest) {
    const near = put(shown(view, nearest)), middle = [(near[0] + edge[0]) / 2, (near[1] + edge[1]) / 2];
    drawn.line([edge, near], "thin");
    drawn.circle(near[0], near[1], 4, "medium", "paper");
    labels.keepLine([edge, near], 3);
    if (missing) labels.add(missing, middle, { px: 12, gap: 6, from: 99 });
  }
  for (const colour of ["paper", "ink"]) stroke(drawn, edge, chosen.verdict, 18, colour);
  labels.keep(...edge, 9);
  if (seen.way) beyond(drawn, labels, seen);
  // Its letters are wider than the measure of their size tells: they are bold.
  labels.add(chosen.name, edge, { px: 14, weight: 600, gap: 14, from: 99 });
  return seen.way !== null;
}
