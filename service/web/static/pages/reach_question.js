// What is asked of all places of a list: tool, frame, what the numbers mean, what is left open.
// Idea: each choice stands in the address under its own name. Left out: the list itself.

import { choose, chosen } from "./address.js";
import { el, fill } from "./elements.js";
import { typed, UNITS } from "./numbers.js";
import { ALONG, FORMS } from "./reach_asking.js";
import { say, WORDS } from "./words.js";

const DEFAULTS = {
  tool: "", frame: "base", form: "xyz-fixed", units: "", freedom: "", approach: "", along: "tool-z",
  order: "margin", decimal: "auto",
};

/**
 * Fit the choices into a place of the page; returns what tells them.
 * @param {HTMLElement} place @param {object} arm as GET /v1/arms/{arm} answers
 * @param {string[]} cellFrames @param {() => void} changed
 * @returns {() => object} the question now: tool, frame, form, units, freedom, approach, along, order
 */
export function questionDesk(place, arm, cellFrames, changed) {
  const document = arm.arm, words = WORDS.reach.question;
  const said = chosen({ ...DEFAULTS, tool: document.default_tool ?? "", units: document.units });
  const tools = [...Object.keys(document.tools ?? {}), "flange"];
  if (!said.tool && tools.length === 1) said.tool = "flange";
  const frames = ["base", "world", ...Object.keys(document.frames ?? {}), ...cellFrames];
  const options = {
    tool: said.tool ? tools : ["", ...tools], frame: [...new Set(frames)], form: FORMS, units: UNITS,
    freedom: ["", "spin", "cone:15", "cone:30", "cone:45", "cone:90", "orientation"],
    along: Object.keys(ALONG), order: ["margin", "singularity"], decimal: ["auto", "point", "comma"],
  };
  const take = (name, value) => {
    said[name] = value;
    choose({ [name]: value === DEFAULTS[name] ? null : value });
    changed();
  };
  const field = (name) => el("label", {}, words[name], name === "approach"
    ? approachField(said, take)
    : select(name, options[name], said, take));
  fill(place, ["tool", "frame", "units", "form", "freedom", "approach", "along", "order", "decimal"].map(field));
  return () => ({ ...said, approach: typed(said.approach) || 0 });
}

/** A choice the address made that is no longer there is shown, so that the refusal says what it was. */
function select(name, options, said, take) {
  const listed = options.includes(said[name]) ? options : [said[name], ...options];
  const field = el("select", { name, onchange: () => take(name, field.value) },
    listed.map((value) => el("option", { value, selected: value === said[name] }, worded(name, value))));
  return field;
}

function worded(name, value) {
  const words = WORDS.reach.question;
  if (value.startsWith("cone:")) return say(words.cone, { angle: value.slice(5) });
  return words.values[name]?.[value] ?? value;
}

function approachField(said, take) {
  const field = el("input", {
    name: "approach", inputmode: "decimal", autocomplete: "off", size: 6, value: said.approach,
    onchange() {
      const value = typed(field.value);
      const fine = field.value.trim() === "" || value >= 0;
      field.setCustomValidity(fine ? "" : WORDS.reach.question.approach_wrong);
      field.reportValidity();
      if (fine) take("approach", field.value.trim());
    },
  });
  return field;
}
