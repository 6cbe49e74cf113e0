// The frames that are drawn round an arm: which of them stand still, where, as the interface tells,
// which are near enough to be drawn, and which way is up. Left out: drawing them.
import { ask, isBusy } from "./ask.js";
import { column } from "./projection.js";

const AGAIN_MS = 1000;
const UPRIGHT = 0.7; // z of the base within 45 deg of the world's
const NEAR_SHARE = 0.8; // Frames farther off than so many sizes of the arm would make it small.

/**
 * Return which frames of a cell hang on the world or a base, and on the bases of which other arms; one on
 * a flange moves, and has no place on a sheet.
 * @param {Record<string, {in: string}>} shared @param {string} arm
 * @returns {{names: string[], arms: string[]}}
 */
export function fixedFrames(shared, arm) {
  const arms = new Set();
  const names = Object.keys(shared).filter((name) => {
    let under = name;
    while (shared[under]) under = shared[under].in;
    const [of, part] = under.split(".");
    if (part === "base" && of !== arm) arms.add(of);
    return under === "world" || part === "base";
  });
  return { names, arms: [...arms] };
}

/**
 * Return poses of frames of an arm in one of them; none where they are not known.
 * @param {string[]} arms the arm, then others whose bases carry frames
 * @param {string[]} names @param {string} within @param {string} [units]
 * @returns {Promise<{name: string, matrix: number[][]}[]>}
 */
export async function framesIn(arms, names, within, units) {
  return posesOf(names, await asked(arms, names, within, units));
}

function asked(arms, names, within, units) {
  const known = (name) => (name === "world" ? name : `${arms[0]}.${name}`);
  const find = names.map((name) => ({ of: known(name), in: known(within) }));
  const body = { arms: arms.map((arm) => ({ arm })), find, form: "matrix", units: units || undefined };
  return ask("/v1/frames", { method: "POST", body });
}

function posesOf(names, { ok, data }) {
  if (!ok) return [];
  return data.answers.map(({ pose }, i) => ({
    name: names[i], matrix: pose.orientation.values.map((row, j) => [...row, pose.position[j]]) }));
}

/** Return the vertical of the world in an arm's base, as soon as it is told; its own z if it never is. */
export async function verticalOf(arm) {
  const answer = await asked([arm], ["world"], "base");
  if (isBusy(answer)) return new Promise((done) => setTimeout(() => done(verticalOf(arm)), AGAIN_MS));
  const [world] = posesOf(["world"], answer);
  return world ? column(world.matrix, 2) : [0, 0, 1];
}

/** Return whether an arm stands upright, so that one looks at it in its base. @param {string} arm */
export const isUpright = async (arm) => (await verticalOf(arm))[2] > UPRIGHT;

/**
 * Return the frames beside the base that are near an arm.
 * @param {number[][]} line places along the arm @param {{name: string, matrix: number[][]}[]} frames
 */
export function framesNear(line, frames) {
  const along = line[0].map((_, i) => line.map((point) => point[i]));
  const far = NEAR_SHARE * Math.max(...along.map((values) => Math.max(...values) - Math.min(...values)));
  const isNear = ({ matrix }) => line.some((point) =>
    Math.hypot(...point.map((value, i) => value - matrix[i][3])) < far);
  return frames.filter((frame) => frame.name !== "base" && isNear(frame));
}

/** The axis of the joint pointed at, and whether its row turns with the value or against it. */
export function risingOf(axes, rows, joint) {
  const axis = axes.find((one) => one.joint !== null && one.joint === joint);
  return axis ? { axis, sign: rows[axis.row - 1].direction ?? 1 } : null;
}
