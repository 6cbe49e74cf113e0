// What the drawing needs of the interface, each asked once: outlines, frames, envelopes.
// Idea: everything in the arm's base, of the one revision that is looked at; an envelope takes
// the service seconds, so it is asked last. Left out: drawing it, and whose turn it is (reach_turns.js).

import { withQuery } from "./address.js";
import { ask, isBusy } from "./ask.js";
import { moved } from "./projection.js";

const MOST_KEPT = 300;
const AGAIN_MS = 5000;

/**
 * Return what asks about one arm and keeps the answers.
 * @param {{name: string, revision: number}} arm
 */
export function postures({ name, revision }) {
  const kept = new Map();
  const path = `/v1/arms/${encodeURIComponent(name)}`;
  const get = (end, parameters) => {
    const asked = withQuery(path + end, { revision, ...parameters });
    if (!kept.has(asked)) {
      if (kept.size > MOST_KEPT) kept.delete(kept.keys().next().value);
      kept.set(asked, ask(asked).then((answer) => {
        if (!answer.ok) kept.delete(asked);
        return answer.ok ? answer.data : null;
      }));
    }
    return kept.get(asked);
  };
  return {
    async outline(joints, { tool, units, revision: own = revision }) {
      const q = joints.join(",");
      const told = await get("/pose", {
        q, tool, units, frame: "base", outline: 1, form: "matrix", revision: own });
      return told?.poses[0].outline ?? null;
    },
    async frameInBase({ frame, units, revision: own = revision }) {
      if (frame === "base") return (point) => point;
      const told = await get("/relation", { of: frame, in: "base", units, form: "matrix", revision: own });
      if (!told) return null;
      const { position, orientation } = told.answers[0].pose;
      const axes = [0, 1, 2].map((j) => orientation.values.map((row) => row[j]));
      return (point) => point.reduce((sum, value, j) => moved(sum, axes[j], value), position);
    },
  };
}

/**
 * Return what tells the envelope for a question, as far as it is known, and sees to the rest.
 * @param {{name: string, revision: number}} arm
 * @param {ReturnType<import("./reach_turns.js").turns>} turn @param {() => void} changed more is known
 * @returns {(question: {tool: string, units: string}) =>
 *   {state: "waits" | "here" | "refused", data: object | null, say: string}}
 */
export function envelopes(arm, turn, changed) {
  const known = new Map();
  let now = "";
  const wait = (key, question) => turn.last(async (signal) => {
    const answer = await envelope(arm, question, signal), { ok, data, problem } = answer;
    if (signal.aborted) return;
    if (ok) known.set(key, { state: "here", data, say: "" });
    else if (!isBusy(answer)) known.set(key, { state: "refused", data: null, say: problem.detail });
    else setTimeout(() => key === now && wait(key, question), AGAIN_MS);
    changed();
  });
  return (question) => {
    const key = [question.tool, question.units, question.revision].join(" ");
    if (!known.has(key)) known.set(key, { state: "waits", data: null, say: "" });
    const isNew = key !== now;
    now = key;
    if (isNew && known.get(key).state === "waits") wait(key, question);
    else if (isNew) turn.drop();
    return known.get(key);
  };
}

function envelope({ name, revision }, { tool, units, revision: own = revision }, signal) {
  const body = { arm: { name, revision: own }, units, ...(tool ? { tool } : {}) };
  return ask("/v1/reach/envelope", { method: "POST", body, signal });
}
