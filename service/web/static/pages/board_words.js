// What a card says, from one answer about a live pose: its state, its figures, its one sentence.
// Plain functions of what was told and when; left out: elements, and whatever is not on the card.
import { length, signs, unitsOf } from "./numbers.js";
import { say, WORDS } from "./words.js";

const AXES = ["x", "y", "z"];
// Beyond its own three periods, after which the service calls a value stale, so much grace in ms.
const GRACE_MS = 2000;
const LONGEST_PERIOD_MS = 10000;
const MOVES_FROM = { mm: 1, m: 0.001, in: 0.04 };

/**
 * @typedef {object} Said state (good, uncertain, stale, bad, none), word, axes, near, mark, sentence,
 *   simulated, tool, frame, unit, ageMs
 */

/**
 * Return what a card says.
 * @param {any} told the answer about the arm, null where none came
 * @param {number} sinceMs how long ago the answer came
 * @param {string} gone why nothing can be live now ("" where it can)
 * @returns {Said}
 */
export function saidOf(told, sinceMs, gone) {
  const said = { state: "none", word: "", axes: [], near: "", mark: "", sentence: "" };
  Object.assign(said, { simulated: Boolean(told?.simulated), tool: "", frame: "", unit: "", ageMs: null });
  const { stale, uncertain, unheard } = WORDS.board;
  if (!told) return Object.assign(said, gone ? { state: "stale", word: stale, sentence: gone } : nothing());
  if (!told.ok) return Object.assign(said, refused(told, gone));
  const pose = told.poses[0];
  said.ageMs = told.age_ms + sinceMs;
  said.tool = typeof told.tool === "string" ? told.tool : WORDS.board.given_tool;
  said.frame = told.frame;
  said.unit = unitsOf(told.units).length;
  const isBad = told.quality === "bad";
  if (gone || isBad || isUnheard(told, sinceMs)) {
    const why = gone || (isBad ? whyBad(told) : unheard);
    return Object.assign(said, { state: "stale", word: stale, sentence: why, mark: "✕" });
  }
  said.axes = AXES.map((_, index) => length(pose.position[index], told.units));
  said.near = signs(pose.nearest?.say ?? "");
  if (told.quality === "uncertain") {
    return Object.assign(said, { state: "uncertain", word: uncertain, sentence: begun(told.say) });
  }
  return Object.assign(said, { state: "good" }, matters(pose, told));
}

/** Periods of an hour and the like are no promise to hear anything soon. */
function isUnheard(told, sinceMs) {
  const period = told.input?.period_ms;
  if (period > LONGEST_PERIOD_MS) return false;
  return sinceMs > 3 * (period ?? LONGEST_PERIOD_MS) + GRACE_MS;
}

const nothing = () => ({ word: WORDS.board.never });

const whyBad = (told) => (told.reason === "stale" ? WORDS.board.silent : begun(told.say));

/** A sentence of the service, which may go on with others, as one that begins. */
const begun = (text) => signs(text.charAt(0).toUpperCase() + text.slice(1));

function refused(told, gone) {
  const isSilent = told.reason === "stale" && told.problem?.code === "no-live-pose";
  const sentence = gone || (isSilent ? WORDS.board.refused : begun(told.problem?.say || told.say || ""));
  return { state: "bad", word: WORDS.board.no_pose, sentence, mark: "✕" };
}

/** Return the one thing that matters most about a pose that can be relied on. */
function matters(pose, told) {
  const isGraver = (one, other) => one.code <= 4 && one.code > (other?.code ?? 0);
  const finding = pose.findings.reduce((most, one) => (isGraver(one, most) ? one : most), null);
  if (finding?.code >= 3) {
    const key = finding.code === 4 ? "outside" : "outside_work";
    const { joint, joints_together: together } = WORDS.board;
    const who = finding.joint ? say(joint, { joint: finding.joint }) : together;
    return { mark: finding.code === 4 ? "▲" : "△", sentence: say(WORDS.board[key], { who }) };
  }
  if (finding) {
    const { kinds, joints } = pose.singularity;
    const values = { kinds: kinds.join(", "), joints: joints.join(", ") };
    const key = finding.code === 2 ? "singular" : "near";
    const text = WORDS.board[kinds.length && joints.length ? key : `${key}_plain`];
    return { mark: finding.code === 2 ? "◆" : "◇", sentence: say(text, values) };
  }
  const speed = told.speeds?.tool_speed;
  if (speed === undefined) return {};
  return { sentence: speed < MOVES_FROM[unitsOf(told.units).length] ? WORDS.board.rests : WORDS.board.moves };
}
