// From a list that was read to what is asked of the interface.
// Idea: what a line says wins over what is said for all lines. Left out: asking, and answers.

import { signs, unitsOf } from "./numbers.js";

/** Numbers of an orientation form. @param {string} form */
export const turnsOf = (form) => (form.startsWith("quaternion") ? 4 : 3);

/** Directions an approach may come along, as the page names them: those of the interface. */
export const ALONG = {
  "tool-z": "tool-z", "-z": [0, 0, -1], z: [0, 0, 1], x: [1, 0, 0], "-x": [-1, 0, 0],
  y: [0, 1, 0], "-y": [0, -1, 0],
};

/**
 * Return the targets of a list. Names that stand twice get the number of their line, for the
 * interface wants each of its own.
 * @param {import("./reach_reading.js").Place[]} places
 * @param {{form: string, freedom: string, approach: number, along: string}} question
 */
export function targetsOf(places, question) {
  const seen = new Set();
  return places.map((place) => {
    const target = placeOf(place, question);
    const distance = place.approach ?? question.approach;
    if (distance > 0) target.approach = { distance, along: ALONG[question.along] };
    if (place.name === null) return target;
    let name = place.name;
    while (seen.has(name)) name = `${name.slice(0, 180)} (${place.line})`;
    seen.add(name);
    return { name, ...target };
  });
}

function placeOf({ position, turns, freedom }, question) {
  if (!turns) return freedom ? { position, freedom } : { position };
  const left = freedom ?? freedomSaid(question.freedom, question.units);
  const pose = { position, orientation: { form: question.form, values: turns } };
  return left ? { pose, freedom: left } : { pose };
}

/** A freedom as the page keeps it, "", "spin", "orientation" or "cone:30": always degrees. */
function freedomSaid(said, units) {
  const cone = /^cone:(.+)$/.exec(said);
  const inUnit = unitsOf(units).angle === "rad" ? Math.PI / 180 : 1;
  return cone ? { cone: Number(cone[1]) * inUnit } : said;
}

/**
 * Return the body of a check.
 * @param {{name: string, revision: number}} arm @param {object} question
 * @param {object[]} targets @param {"best" | "all"} solutions
 */
export function checkBody({ name, revision }, question, targets, solutions) {
  const { frame, units } = question;
  const body = { arm: { name, revision }, targets, solutions, frame, units };
  if (question.tool) body.tool = question.tool;
  if (question.order === "singularity") body.order = "singularity";
  return body;
}

/** Return what a refused question says of single targets: a map from place in the list to words. */
export function refusedTargets(problem) {
  const found = new Map();
  for (const error of problem.errors ?? []) {
    const match = /^\/targets\/(\d+)/.exec(error.pointer ?? "");
    if (match) found.set(Number(match[1]), signs([error.say, error.way_out].filter(Boolean).join("; ")));
  }
  return found;
}
