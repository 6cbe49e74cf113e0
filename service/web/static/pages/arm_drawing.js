// An arm on paper, whichever way it is looked at: bodies, frames, tool path, lost motion, labels.
// Idea: a scene holds what the interface answered, in the frame asked for; this file puts it on the
// paper from back to front and computes nothing about the arm.
// Left out: where views stand on a sheet (sheet_views.js), lines and letters (pen.js).

import { ground, labelsOn, lostMotion, rising, triad } from "./marks.js";
import { bounds, column } from "./projection.js";
import { bodiesOf } from "./solids.js";

/**
 * @typedef {Object} Scene
 * @property {object} outline as GET pose?outline=1 tells it
 * @property {string} [toolName]
 * @property {{name: string, matrix: number[][]}[]} [frames] in the frame of the outline
 * @property {number[][]} [path] places where the tool was
 * @property {object} [singularity] as told beside the pose
 * @property {"thick" | "heavyDashed"} [kind] of the arm's edges
 * @property {string} [struck] a word: the arm is drawn as a dashed line alone
 * @property {boolean} [balloons] number the joints
 * @property {{axis: object, sign: number}} [rising] an axis of the outline whose sense is shown
 */

/** Return every place a scene takes, to be fitted on the paper. @param {Scene} scene */
function placesOf(scene) {
  const places = [...scene.outline.line];
  for (const frame of scene.frames ?? []) places.push(column(frame.matrix, 3));
  return places.concat(scene.path ?? []);
}

/** Return the box of a scene, and of other places, with some room round it. @param {Scene} scene */
export function boxOf(scene, share = 0.08, others = []) {
  const box = bounds([...placesOf(scene), ...others]);
  const size = Math.max(...box[1].map((high, i) => high - box[0][i]), 1e-9);
  return bounds(box, size * share);
}

/** Return the pixel radius of the thickest bar: of the arm's size on the paper, within reason. */
export function thicknessOf(put, outline) {
  const points = outline.line.map(put);
  const [low, high] = bounds(points);
  const size = Math.hypot(high[0] - low[0], high[1] - low[1]);
  return Math.min(Math.max(size * 0.028, 4), 13);
}

/**
 * Draw a scene.
 * @param {object} pen @param {(point: number[]) => number[]} put of `placed` or `fitted`
 * @param {Scene} scene @param {{size?: number}} [how] `size`: pixel radius of the thickest bar
 */
export function drawArm(pen, put, scene, how = {}) {
  const { outline } = scene;
  const size = how.size ?? thicknessOf(put, outline);
  const labels = labelsOn(pen);
  ground(pen, put, outline.base, size);
  if (scene.path?.length > 1) pen.line(scene.path.map(put), "path");
  labels.keepLine(outline.line.map(put), size);
  for (const frame of scene.frames ?? []) {
    triad(pen, put, frame.matrix, how.axes ?? 26, labels, frame.name);
  }
  for (const line of how.keep ?? []) labels.keepLine(line, 12);
  if (scene.struck) pen.line(outline.line.map(put), "dashed");
  else bodiesOf(put, outline, size, scene.kind).sort((a, b) => a.near - b.near).forEach((body) => body.draw(pen));
  toolPoint(pen, put, scene, labels, how);
  if (scene.rising) rising(pen, put, scene.rising, labels);
  if (scene.balloons && !scene.struck) balloons(put, outline, size, labels);
  labels.write();
}

function toolPoint(pen, put, scene, labels, how) {
  const { outline, singularity } = scene, place = column(outline.tool, 3);
  if (singularity?.lost_motion.length) {
    lostMotion(pen, put, place, singularity.lost_motion, singularity.state === "singular");
  }
  triad(pen, put, outline.tool, how.axes ?? 26, labels, "");
  if (scene.toolName) labels.add(scene.toolName, put(place), { gap: 20, weight: 600 });
}

function balloons(put, outline, size, labels) {
  outline.axes.forEach((axis, i) => {
    if (axis.joint === null) return;
    const span = Math.hypot(...axis.to.map((one, k) => one - axis.from[k])) * put.px;
    const share = !axis.slides && span > 5 * size * (1 - (0.5 * i) / outline.axes.length) ? 0.5 : axis.slides ? 1 : 0;
    const at = put(axis.from.map((one, k) => one + share * (axis.to[k] - one)));
    labels.add(String(axis.joint), at, { balloon: 8.5, gap: size * 1.6 + 10, from: size });
  });
}
