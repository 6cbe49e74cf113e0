// The card of one arm: its elements, made once, and the writing of what has changed on it.
// Left out: what it says (board_words.js), where it stands (board.js).
import { el, setAttribute, setText } from "./elements.js";
import { age } from "./numbers.js";
import { say, WORDS } from "./words.js";

const LONG = 8; // characters of a figure from which on it is set smaller

/**
 * Make the card of an arm.
 * @param {{name: string, title: string|null}} arm
 * @param {string} query what the sheet is to be opened with
 * @returns {{element: HTMLElement, write: (said: import("./board_words.js").Said) => void}}
 */
export function card(arm, query) {
  const id = `card-${arm.name}`;
  const axes = ["x", "y", "z"].map((axis) => ({ axis, value: el("dd"), unit: el("small") }));
  const [simulated, near, mark, sentence] = [el("span", { class: "simulated" }), el("p", { class: "near" }), el("b", { "aria-hidden": "true" }), el("span")];
  const [word, note] = [el("b"), el("span")];
  const [tool, frame, old] = [el("dd"), el("dd"), el("dd")];
  const figures = el("dl", {}, axes.map(({ axis, value, unit }) => el("div", {}, el("dt", {}, axis, unit), value)));
  const instead = el("div", { class: "instead" }, word, note);
  const element = el(
    "article",
    { class: "card frame", "aria-labelledby": id, dataset: { arm: arm.name, state: "none" } },
    el("div", {}, head(arm, id, query, simulated), el("div", { class: "place" }, figures, instead),
      el("div", { class: "words" }, near, el("p", { class: "sentence" }, mark, sentence)), block(tool, frame, old)),
  );
  const parts = { element, axes, simulated, near, mark, sentence, word, note, tool, frame, old, figures, instead };
  return { element, write: (said) => write(parts, said) };
}

function head(arm, id, query, simulated) {
  const link = el("a", { href: `/arms/${encodeURIComponent(arm.name)}${query}` }, arm.name);
  const title = el("span", { class: "title", title: arm.title ?? "" }, arm.title ?? "");
  return el("div", { class: "head" }, el("h2", { id }, link), simulated, title);
}

function block(tool, frame, old) {
  const cell = (name, value) => el("div", {}, el("dt", {}, name), value);
  return el("dl", { class: "block" }, cell(WORDS.board.tool, tool), cell(WORDS.board.in, frame), cell(WORDS.board.age, old));
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
  setAttribute(parts.simulated, "hidden", said.simulated ? null : "");
  setText(parts.near, said.near);
  const flag = hasPose && said.word ? `${said.word} ` : said.mark && `${said.mark} `;
  setText(parts.mark, flag);
  setAttribute(parts.mark, "aria-hidden", hasPose && said.word ? null : "true");
  setText(parts.sentence, said.sentence);
  setText(parts.word, hasPose ? "" : said.word);
  parts.word.classList.toggle("small", said.word.length > 6);
  const aged = said.ageMs === null ? "" : age(said.ageMs);
  setText(parts.note, hasPose || !aged ? "" : say(WORDS.board.last, { age: aged }));
  setText(parts.tool, said.tool || WORDS.shell.none);
  setText(parts.frame, said.frame || WORDS.shell.none);
  setText(parts.old, aged || WORDS.shell.none);
}
