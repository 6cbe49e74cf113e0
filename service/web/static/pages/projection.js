// From the arm's axes to the paper: three ways of looking, and the scale that has room.
// Idea: parallel projection on two unit vectors of the sheet; a third points to the viewer and
// tells what lies in front. Scales are those of a draughtsman's ruler (ISO 5455 and between).
// Left out: perspective, in which nothing could be measured.

/** Pixels of CSS for a millimetre of paper. */
const PX_PER_MM = 96 / 25.4;

/** Millimetres in a unit of length of the interface. */
export const MM_IN = { mm: 1, m: 1000, in: 25.4 };

const STEPS = [1, 1.25, 1.5, 2, 2.5, 3, 4, 5, 6, 7.5];

/**
 * @typedef {{kind: string, across: number[], up: number[], toward: number[]}} View
 * `across` points right on the paper, `up` upwards, `toward` to the viewer.
 * @typedef {{x: number, y: number, width: number, height: number}} Box
 * @typedef {{words: string, px: number}} Scale  `px`: pixels for one unit of the arm.
 */

/**
 * Return a way of looking: "elevation" (x right, z up), "plan" (x right, y up, from above),
 * "side" (y right, z up, from the right) or "free", turned by `yaw` about z and raised by `pitch`.
 * @param {string} kind @param {number} [yaw] @param {number} [pitch] radians @returns {View}
 */
export function view(kind, yaw = 0, pitch = 0) {
  const fixed = {
    elevation: [[1, 0, 0], [0, 0, 1], [0, -1, 0]],
    plan: [[1, 0, 0], [0, 1, 0], [0, 0, 1]],
    side: [[0, 1, 0], [0, 0, 1], [1, 0, 0]],
  }[kind];
  if (fixed) return { kind, across: fixed[0], up: fixed[1], toward: fixed[2] };
  const [c, s, cp, sp] = [Math.cos(yaw), Math.sin(yaw), Math.cos(pitch), Math.sin(pitch)];
  return { kind, across: [c, s, 0], up: [-s * sp, c * sp, cp], toward: [s * cp, -c * cp, sp] };
}

/** @param {number[]} a @param {number[]} b */
export const dot = (a, b) => a[0] * b[0] + a[1] * b[1] + a[2] * b[2];

/** Return `a + b * by`. @param {number[]} a @param {number[]} b @param {number} by */
export const moved = (a, b, by) => [a[0] + b[0] * by, a[1] + b[1] * by, a[2] + b[2] * by];

/** @param {number[]} a @param {number[]} b */
export const cross = (a, b) => [
  a[1] * b[2] - a[2] * b[1],
  a[2] * b[0] - a[0] * b[2],
  a[0] * b[1] - a[1] * b[0],
];

/** @param {number[]} a */
export function unit(a) {
  const length = Math.hypot(...a);
  return length > 0 ? a.map((one) => one / length) : [0, 0, 1];
}

/** Return a column of a 4 x 4 matrix: 0 to 2 its axes, 3 its place. */
export const column = (matrix, j) => [matrix[0][j], matrix[1][j], matrix[2][j]];

/**
 * Return the box around points, padded on all sides; null without points.
 * @param {number[][]} points @param {number} [padding] @returns {number[][] | null} low and high
 */
export function bounds(points, padding = 0) {
  if (!points.length) return null;
  const low = [...points[0]], high = [...points[0]];
  for (const point of points) {
    for (let i = 0; i < 3; i++) {
      if (point[i] < low[i]) low[i] = point[i];
      if (point[i] > high[i]) high[i] = point[i];
    }
  }
  return [low.map((one) => one - padding), high.map((one) => one + padding)];
}

/** Whether a box holds another. @param {number[][]} outer @param {number[][]} inner */
export const holds = (outer, inner) =>
  inner[0].every((one, i) => one >= outer[0][i]) && inner[1].every((one, i) => one <= outer[1][i]);

/** Return how far a box of the arm reaches on the paper: left, right, bottom, top. */
function shadow(looked, [low, high]) {
  const reach = (direction) => {
    let least = 0, most = 0;
    direction.forEach((part, i) => {
      least += part * (part > 0 ? low[i] : high[i]);
      most += part * (part > 0 ? high[i] : low[i]);
    });
    return [least, most];
  };
  return [...reach(looked.across), ...reach(looked.up)];
}

/**
 * Return the largest scale at which so much of the arm has room.
 * @param {number} width @param {number} height in units of the arm
 * @param {Box} room @param {number} mmPerUnit @returns {Scale}
 */
export function scaleWithRoom(width, height, room, mmPerUnit) {
  const most = Math.min(room.width / Math.max(width, 1e-9), room.height / Math.max(height, 1e-9));
  const reduced = (PX_PER_MM * mmPerUnit) / most; // as in 1 : reduced
  const wanted = reduced >= 1 ? reduced : 1 / reduced;
  const power = 10 ** Math.floor(Math.log10(wanted) + 1e-12);
  const steps = [...STEPS, 10].map((step) => step * power);
  const tidy = (value) => Number(value.toPrecision(4));
  const factor = reduced >= 1
    ? steps.find((step) => step >= wanted * (1 - 1e-9)) ?? steps.at(-1)
    : steps.findLast((step) => step <= wanted * (1 + 1e-9)) ?? steps[0];
  const ratio = reduced >= 1 ? 1 / factor : factor;
  const words = reduced >= 1 ? `1:${tidy(factor)}` : `${tidy(factor)}:1`;
  return { words, px: PX_PER_MM * mmPerUnit * ratio };
}

/**
 * Return what puts points of the arm on the paper: (point) => [x, y, nearness].
 * @param {View} looked @param {number} px @param {number[]} centre of the arm, shown at
 * @param {number} x @param {number} y
 */
export function placed(looked, px, centre, x, y) {
  const { across, up, toward } = looked;
  const left = x - px * dot(across, centre), top = y + px * dot(up, centre);
  const put = (p) => [left + px * dot(across, p), top - px * dot(up, p), dot(toward, p)];
  return Object.assign(put, { view: looked, px });
}

/**
 * Return what puts a box of the arm into a box of the paper, at the largest ruler scale with room.
 * @param {View} looked @param {number[][]} box of the arm @param {Box} room
 * @param {number} mmPerUnit @param {Scale} [scale] to keep
 */
export function fitted(looked, box, room, mmPerUnit, scale) {
  const [left, right, bottom, top] = shadow(looked, box);
  const taken = scale ?? scaleWithRoom(right - left, top - bottom, room, mmPerUnit);
  const centre = moved(
    moved([0, 0, 0], looked.across, (left + right) / 2), looked.up, (bottom + top) / 2,
  );
  const middle = [room.x + room.width / 2, room.y + room.height / 2];
  return Object.assign(placed(looked, taken.px, centre, ...middle), { scale: taken });
}

/** Return a round length that takes at most so many pixels: 1, 2 or 5 and tenfolds. */
export function roundLength(mostPx, px) {
  const most = mostPx / px;
  const power = 10 ** Math.floor(Math.log10(most));
  return (most >= 5 * power ? 5 : most >= 2 * power ? 2 : 1) * power;
}
