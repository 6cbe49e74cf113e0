// What the drawing needs of the interface, each asked once: envelopes, outlines, frames.
// Idea: everything in the arm's base. Left out: drawing it.

import { withQuery } from "./address.js";
import { ask } from "./ask.js";
import { moved } from "./projection.js";

const MOST_KEPT = 300;

/** Return what asks for one arm and keeps the answers. @param {string} name */
export function postures(name) {
  const kept = new Map();
  const path = `/v1/arms/${encodeURIComponent(name)}`;
  const once = (key, question) => {
    if (!kept.has(key)) {
      if (kept.size > MOST_KEPT) kept.delete(kept.keys().next().value);
      kept.set(key, question().then((answer) => {
        if (!answer.ok) kept.delete(key);
        return answer.ok ? answer.data : null;
      }));
    }
    return kept.get(key);
  };
  const get = (end, parameters) => {
    const asked = withQuery(path + end, parameters);
    return once(asked, () => ask(asked));
  };
  return {
    async outline(joints, { tool, units }) {
      const told = await get("/pose", { q: joints.join(","), tool, units, frame: "base", outline: 1, form: "matrix" });
      return told?.poses[0].outline ?? null;
    },
    envelope({ tool, units }) {
      const body = { arm: name, units, ...(tool ? { tool } : {}) };
      return once(`envelope ${tool} ${units}`, () => ask("/v1/reach/envelope", { method: "POST", body }));
    },
    async frameInBase({ frame, units }) {
      if (frame === "base") return (point) => point;
      const told = await get("/relation", { of: frame, in: "base", units, form: "matrix" });
      if (!told) return null;
      const { position, orientation } = told.answers[0].pose;
      const axes = [0, 1, 2].map((j) => orientation.values.map((row) => row[j]));
      return (point) => point.reduce((sum, value, j) => moved(sum, axes[j], value), position);
    },
  };
}
