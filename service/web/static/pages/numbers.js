// Numbers as people read them: so many digits per unit, a true minus sign, never a minus before zero.
// Left out: changing the units of what is answered, which the service does.
import { WORDS } from "./words.js";

const MINUS = "\u2212";
/** Decimals of a value in each unit: what a machine of this kind can show, not what a double holds. */
export const DECIMALS = { mm: 1, m: 4, in: 3, deg: 2, rad: 4 };

/**
 * Return a number with fixed decimals, a dash for what is none.
 * @param {number|null|undefined} value
 * @param {number} decimals
 * @returns {string}
 */
export function number(value, decimals) {
  if (value === null || value === undefined || !Number.isFinite(value)) return WORDS.shell.none;
  const text = Math.abs(value).toFixed(decimals);
  return value < 0 && Number(text) !== 0 ? MINUS + text : text;
}

/** Return a sentence of the service with the minus signs of its numbers as they stand beside it here. */
export const signs = (text) => text.replace(/(^|[\s(,=])-(?=\d)/g, `$1${MINUS}`);

/** The choices of units that all pages give. */
export const UNITS = ["mm-deg", "m-rad", "in-deg"];

const THREE = ["xyx", "xyz", "xzx", "xzy", "yxy", "yxz", "yzx", "yzy", "zxy", "zxz", "zyx", "zyz"];

/** Orientation forms a table can carry, the usual one first. */
export const FORMS = [
  ...["xyz", ...THREE.filter((one) => one !== "xyz")].map((one) => `${one}-fixed`),
  ...THREE.map((one) => `${one}-current`),
  "rotation-vector", "quaternion-wxyz", "quaternion-xyzw",
];

/**
 * Return the unit of lengths and the unit of angles that "mm-deg" names.
 * @param {string} units
 * @returns {{length: string, angle: string}}
 */
export function unitsOf(units) {
  const [length, angle] = units.split("-");
  return { length, angle };
}

const ANGLES = { deg: Math.PI / 180, rad: 1 }, LENGTHS = { mm: 1e-3, m: 1, in: 0.0254 };

/**
 * Return joint values that a person typed in the units chosen now; what was short is short again.
 * @param {string} q @param {{joint: number|null, unit: string}[]} travel which of them are angles
 * @param {string} from @param {string} to units, as "mm-deg"
 * @returns {string}
 */
export function jointsIn(q, travel, from, to) {
  if (from === to) return q;
  const joints = travel.filter((one) => one.joint !== null), was = unitsOf(from), is = unitsOf(to);
  return q.split(",").map((text, i) => {
    const factor = joints[i]?.unit in ANGLES
      ? ANGLES[was.angle] / ANGLES[is.angle] : LENGTHS[was.length] / LENGTHS[is.length];
    const value = Number(text) * factor, short = Number(value.toPrecision(12));
    return Math.abs(short - value) <= 1e-14 * Math.abs(value) ? short : value;
  }).join();
}

/** Return a length in the decimals of its unit. @param {number|null} value @param {string} units */
export const length = (value, units) => number(value, DECIMALS[unitsOf(units).length] ?? 3);

/** Return an angle in the decimals of its unit. @param {number|null} value @param {string} units */
export const angle = (value, units) => number(value, DECIMALS[unitsOf(units).angle] ?? 4);

/**
 * Return an age in words short enough for a card: "0.1 s", "14 s", "3 min".
 * @param {number} ms
 * @returns {string}
 */
export function age(ms) {
  const s = Math.max(ms, 0) / 1000;
  if (s < 9.95) return `${s.toFixed(1)} ${WORDS.shell.s}`;
  if (s < 120) return `${Math.floor(s + 0.05)} ${WORDS.shell.s}`;
  if (s < 7200) return `${Math.floor(s / 60)} ${WORDS.shell.min}`;
  if (s < 172800) return `${Math.floor(s / 3600)} ${WORDS.shell.h}`;
  return `${Math.floor(s / 86400)} ${WORDS.shell.d}`;
}

/** Return hours and minutes of the day, "10:42". @param {Date} time */
export function clock(time) {
  return `${String(time.getHours()).padStart(2, "0")}:${String(time.getMinutes()).padStart(2, "0")}`;
}

/**
 * Return the number a person typed, with a decimal comma or point and any minus; NaN if it is none.
 * @param {string} text
 * @returns {number}
 */
export function typed(text) {
  const plain = text.trim().replace(/[\u2212\u2013]/g, "-").replace(",", ".");
  return /^[+-]?(\d+\.?\d*|\.\d+)(e[+-]?\d+)?$/i.test(plain) ? Number(plain) : NaN;
}
