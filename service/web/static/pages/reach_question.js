// What is asked of all places of a list: tool, frame, what the numbers mean, what is left open.
// Idea: each choice stands in the address under its own name; what is seldom chosen is folded away
// as long as it is as usual. Left out: the list itself.

import { choose, chosen } from "./address.js";
import { el, fill } from "./elements.js";
import { FORMS, typed, UNITS } from "./numbers.js";
import { ALONG } from "./reach_asking.js";
import { say, WORDS } from "./words.js";

const DEFAULTS = {
  tool: "", frame: "base", form: "xyz-fixed", units: "", freedom: "", approach: "", along: "tool-z",
  order: "margin", decimal: "auto",
};

const SHOWN = ["tool", "frame", "units", "form", "approach", "along"];
const FOLDED = ["freedom", "order", "decimal"];

/**
 * Fit the choices into a place of the page; returns what tells them, and takes frames of the cell.
 * @param {HTMLElement} place @param {object} arm as GET /v1/arms/{arm} answers
 * @param {() => void} changed
 * @returns {{now: () => object, frames: (names: string[]) => void}}
 *   now: tool, frame, form, units, freedom, approach, along, order
 */
export function questionDesk(place, arm, changed) {
  const document = arm.arm, words = WORDS.reach.question;
  const said = chosen({ ...DEFAULTS, tool: document.default_tool ?? "", units: document.units });
  const tools = [...Object.keys(document.tools ?? {}), "flange"];
  if (!said.tool && tools.length === 1) said.tool = "flange";
  const options = {
    tool: said.tool ? tools : ["", ...tools], form: FORMS, units: UNITS,
    frame: [...new Set(["base", "world", ...Object.keys(document.frames ?? {})])],
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
  const isUsual = FOLDED.every((name) => said[name] === DEFAULTS[name]);
  fill(place, SHOWN.map(field), el("details", { open: !isUsual },
    el("summary", {}, words.more), el("div", { class: "fields" }, FOLDED.map(field))));
  return {
    now: () => ({ ...said, approach: typed(said.approach) || 0 }),
    frames(names) {
      const list = place.querySelector("[name=frame]");
      const known = new Set([...list.options].map((option) => option.value));
      for (const name of names) if (!known.has(name)) list.append(el("option", { value: name }, name));
    },
  };
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
