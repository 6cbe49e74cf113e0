// The card of one arm: its elements, made once, and the writing of what has changed on it.
// Left out: what it says (board_words.js), where it stands (board.js).
import { el, setAttribute, setText } from "./elements.js";
import { age } from "./numbers.js";
import { say, WORDS } from "./words.js";

const LONG = 8; // characters of a figure from which on it is set smaller
const SHORT_NAME = 14; // characters of a name that has room for a word beside it
const LONG_NAME = 22; // from which on it takes the line of the title too

/**
 * Make the card of an arm.
 * @param {{name: string, title: string|null}} arm
 * @param {string} query what the sheet is to be opened with
 * @returns {{element: HTMLElement, write: (said: import("./board_words.js").Said) => void}}
 */
export function card(arm, query) {
  const id = `card-${arm.name}`;
  const axes = ["x", "y", "z"].map((axis) => ({ axis, value: el("dd"), unit: el("small") }));
  const near = el("p", { class: "near" }), sentence = el("span");
  const mark = el("b", { "aria-hidden": "true" });
  const doubt = el("b", { class: "doubt" }), simulated = el("span", { class: "simulated" });
  const [word, note] = [el("b"), el("span")];
  const [tool, frame, old] = [el("dd"), el("dd"), el("dd")];
  const figures = el("dl", {}, axes.map(({ axis, value, unit }) =>
    el("div", {}, el("dt", {}, axis, unit), value)));
  const instead = el("div", { class: "instead" }, word, note);
  const element = el(
    "article",
    { class: "card frame", "aria-labelledby": id, dataset: { arm: arm.name, state: "none" } },
    el("div", {}, head(arm, id, query, doubt, simulated),
      el("div", { class: "place" }, figures, instead),
      el("div", { class: "words" }, near, el("p", { class: "sentence" }, mark, sentence)),
      block(tool, frame, old)),
  );
  const parts = {
    element, axes, doubt, simulated, near, mark, sentence, word, note, tool, frame, old, figures, instead };
  return { element, write: (said) => write(parts, said) };
}

function head(arm, id, query, doubt, simulated) {
  const link = el("a", { href: `/arms/${encodeURIComponent(arm.name)}${query}` }, arm.name);
  const title = el("span", { class: "title", title: arm.title ?? "" }, arm.title ?? "");
  const { length } = arm.name, how = length > LONG_NAME ? " long" : length > SHORT_NAME ? "" : " short";
  return el("div", { class: `head${how}` }, el("h2", { id }, link), doubt, title, simulated);
}

function block(tool, frame, old) {
  const cell = (name, value) => el("div", {}, el("dt", {}, name), value);
  return el("dl", { class: "block" },
    cell(WORDS.board.tool, tool), cell(WORDS.board.in, frame), cell(WORDS.board.age, old));
}

function write(parts, said) {
  const hasPose = said.axes.length > 0;
  setAttribute(parts.element, "data-state", said.state);
  setAttribute(parts.figures, "hidden", hasPose ? null : "");
  setAttribute(parts.instead, "hidden", hasPose ? "" : null);
  parts.axes.forEach(({ value, unit }, index) => {
    setText(value, said.axes[index] ?? "");
    setText(unit, said.unit);
  });
  setAttribute(parts.figures, "data-long", said.axes.some((text) => text.length > LONG) ? "" : null);
  setText(parts.simulated, said.simulated ? WORDS.board.simulated : "");
  setText(parts.near, said.near);
  setText(parts.mark, said.mark && `${said.mark} `);
  setText(parts.sentence, said.sentence);
  setText(parts.doubt, hasPose ? said.word : "");
  setText(parts.word, hasPose ? "" : said.word);
  parts.word.classList.toggle("small", said.word.length > 6);
  const aged = said.ageMs === null ? "" : age(said.ageMs);
  setText(parts.note, hasPose || !aged ? "" : say(WORDS.board.last, { age: aged }));
  setText(parts.tool, said.tool || WORDS.shell.none);
  setAttribute(parts.tool, "title", said.tool || null);
  setAttribute(parts.frame, "title", said.frame || null);
  setText(parts.frame, said.frame || WORDS.shell.none);
  setText(parts.old, aged || WORDS.shell.none);
}
