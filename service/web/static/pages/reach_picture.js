// What is drawn of the place that is looked at, and what is said below the drawing.
// Idea: drawn at once with what is known, and again whenever more is: outlines soon, the envelope
// last; nothing stands that belongs to another question. Left out: lines (reach_drawing.js), asking.

import { el, fill, setText } from "./elements.js";
import { number, signs } from "./numbers.js";
import { column } from "./projection.js";
import { reachDrawing } from "./reach_drawing.js";
import { kindOf, verdictOf } from "./reach_list.js";
import { envelopes, postures } from "./reach_postures.js";
import { NUMBERED } from "./reach_signs.js";
import { ready } from "./shell.js";
import { say, WORDS } from "./words.js";

const MOST_DRAWN = 5000;    // More places would cover the paper, and each other.
const FLICKER_MS = 150;     // So long the picture before stays, so that stepping does not flicker.

/**
 * Return what draws a scene (row, rows, at, solution, question), and what becomes known of it later.
 * @param {{canvas: HTMLCanvasElement, legend: HTMLElement, block: HTMLElement}} places
 * @param {object} arm as GET /v1/arms/{arm} answers @param {number[]} vertical of the world, in its base
 * @param {object} turn of reach_turns.js
 */
export function pictureDesk(places, arm, vertical, turn) {
  const desk = {
    ...places, arm, vertical, turn, draw: reachDrawing(places.canvas), asked: postures(arm), scene: null, parts: {} };
  desk.envelope = envelopes(arm, turn, () => paint(desk));
  // On paper the scale is another.
  for (const event of ["beforeprint", "afterprint"]) addEventListener(event, () => desk.scene && paint(desk));
  return (scene) => show(desk, scene);
}

async function show(desk, scene) {
  const { solution, question } = scene, isOther = keyOf(question) !== keyOf(desk.scene?.question);
  desk.scene = scene;
  const approach = solution?.approach, before = approach?.start?.joints ?? approach?.breaks?.joints;
  desk.parts = { put: question.frame === "base" ? (point) => point : null };
  if (isOther) paint(desk);
  const timer = setTimeout(() => paint(desk), FLICKER_MS);
  const outline = (joints) => joints && desk.asked.outline(joints, question);
  const asked = () => Promise.all([
    // Without a solution no arm is drawn: one as it stood once could be taken for where it is.
    outline(solution?.joints), outline(before), desk.asked.frameInBase(question)]);
  const isAsked = solution || question.frame !== "base";
  const [posture, start, put] = await (isAsked ? desk.turn.first(asked) : asked());
  clearTimeout(timer);
  if (desk.scene !== scene) return;
  desk.parts = { outline: posture ?? null, before: start ?? null, put };
  paint(desk);
}

const keyOf = (question) =>
  question && [question.tool, question.units, question.frame, question.revision].join(" ");

function paint(desk) {
  const { scene } = desk, envelope = desk.envelope(scene.question);
  const slides = desk.arm.arm.rows[0]?.joint === "prismatic";
  desk.draw({ ...pictureOf(scene, desk.parts, envelope.data), slides, vertical: desk.vertical });
  said(desk, envelope);
  ready();
}

function pictureOf({ row, rows, at, solution, question }, { outline = null, before = null, put }, envelope) {
  const marked = (one, number) => ({ at: put(one.place.position), verdict: kindOf(one), number });
  const reason = row?.result?.reason, near = reason?.nearest, approach = solution?.approach;
  const toolAt = (one) => column(one.tool, 3);
  return {
    envelope, outline, before, units: question.units,
    places: put
      ? rows.map((one, i) => [one, i + 1]).filter(([one]) => one.place && one !== row).slice(0, MOST_DRAWN)
        .map(([one, number]) => marked(one, number))
      : [],
    chosen: put && row?.place ? { ...marked(row, at + 1), name: nameOf(row, at) } : null,
    way: outline && before ? { from: toolAt(before), to: toolAt(outline), isBroken: !approach.ok } : null,
    nearest: put && near && row.place ? put(near.position) : null,
    missing: near && reason.shortfall ? `${number(reason.shortfall, 1)} ${reason.unit}` : "",
  };
}

const nameOf = (row, at) => row.name ?? row.place?.name ?? String(at + 1);

/** The title block, what a screen reader is told of the drawing, and what its lines mean. */
function said(desk, envelope) {
  const words = WORDS.reach, { row, rows, at, question } = desk.scene, { name, revision, digest } = desk.arm;
  // Of another revision, whose survey is looked at alone, the page knows no digest.
  const isOfPage = (question.revision ?? revision) === revision;
  const lines = {
    arm: name, revision: isOfPage ? `${revision} (${digest})` : question.revision, tool: question.tool || WORDS.shell.none,
    frame: question.frame, units: question.units, scale: desk.canvas.dataset.scale ?? "" };
  fill(desk.block, Object.entries(lines).map(([key, value]) =>
    el("div", {}, el("dt", {}, words.block_lines[key]), el("dd", {}, value))));
  desk.canvas.setAttribute("aria-label", row
    ? say(words.drawn, { name: nameOf(row, at), verdict: verdictOf(row) })
    : words.drawn_none);
  desk.legend.dataset.envelope = envelope.state;
  const refused = say(words.envelope_refused, { say: signs(envelope.say) });
  const state = { waits: words.envelope_waits, refused, here: words.legend };
  setText(desk.legend, [
    state[envelope.state], envelope.data?.axis && rows.length > 1 ? words.legend_turned : "",
    rows.length > NUMBERED ? words.legend_many : "",
    desk.canvas.dataset.beyond ? words.legend_beyond : "", words.legend_geometry].filter(Boolean).join(" "));
}
