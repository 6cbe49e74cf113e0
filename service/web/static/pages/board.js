// The board: a card for each arm at a fixed place, written at most ten times a second.
// Places: as the address says (arms=a,b,-,c; a dash leaves one empty), else by name; while the page is
// open nobody moves: new arms come last, removed ones leave their place empty.
// Left out: what a card says (board_words.js) and its elements (card.js).
import { choose, chosen, withQuery } from "./address.js";
import { ask, follow } from "./ask.js";
import { cardsFitted } from "./board_fit.js";
import { saidOf } from "./board_words.js";
import { card } from "./card.js";
import { el, fill, setText } from "./elements.js";
import { clock, UNITS } from "./numbers.js";
import { back, begin, gone, onTheme, ready } from "./shell.js";
import { say, WORDS } from "./words.js";

const GAP_MS = 100;
const AGES_MS = 500;
const NOBODY_MS = 600; // Who has told nothing by then keeps nobody waiting.
const BELOW_PX = 8; // of paper under the last row
const PRINTED_COLUMNS = 3;
const LIST_MS = 30000;
const TELL_MS = 4000; // Ears are told of changed states in turns, not ten times a second.
const ANEW_MS = 1500; // After a break all arms are told anew; who is not has no values.

const early = new Map(); // answers about arms that have no place yet
const places = new Map(); // name -> {card, told, at, epoch, state}
const told = {
  list: document.getElementById("cards"), ears: document.getElementById("told"), changes: new Map() };
const link = {
  stop: () => {}, goneSince: null, epoch: 0, backAt: -Infinity, drawAt: 0, isWaiting: false };
const seen = new IntersectionObserver(look, { rootMargin: "200px" });
const choice = chosen({ frame: "base", units: "", columns: "", arms: "" });

begin();
fitChoices();
addEventListener("resize", measure);
onTheme(measure);
listen();
await list();
setTimeout(ready, NOBODY_MS);
setInterval(list, LIST_MS);
setInterval(() => places.forEach(writeOne), AGES_MS);
setInterval(tellEars, TELL_MS);

/** Read which arms are stored, and give each its place. */
async function list() {
  const arms = [];
  for (let token = ""; token !== null; ) {
    const answer = await ask(withQuery("/v1/arms", { page_size: 100, page_token: token }));
    if (!answer.ok) return;
    arms.push(...answer.data.arms);
    token = answer.data.next_page_token;
  }
  const known = new Map(arms.map((arm) => [arm.name, arm]));
  const wanted = choice.arms ? choice.arms.split(",").filter(Boolean) : arms.map((arm) => arm.name);
  for (const name of wanted) {
    if (name === "-") told.list.childElementCount < wanted.length && told.list.append(blank());
    else if (!places.has(name)) place(known.get(name) ?? { name, title: null }, known.has(name));
  }
  for (const [name, one] of places) {
    if (known.has(name)) one.isUnknown = false;
    if (known.has(name) || one.isUnknown) continue;
    one.holder.replaceChildren(blankBox());
    places.delete(name);
  }
  const counted = WORDS.board[arms.length === 1 ? "count_one" : "count"];
  setText(document.getElementById("count"), say(counted, { n: arms.length }));
  measure();
  if (!told.list.childElementCount) fill(told.list, el("li", {}, WORDS.board.empty));
}

function blankBox() {
  return el("div", { class: "blank" });
}

function blank() {
  return el("li", { "aria-hidden": "true" }, blankBox());
}

function place(arm, isStored) {
  const frame = choice.frame === "base" ? "" : choice.frame;
  const made = card(arm, withQuery("", { frame, units: choice.units }));
  const holder = el("li", {}, made.element);
  if (!places.size && !told.list.querySelector("article")) {
    told.list.replaceChildren(...told.list.querySelectorAll("[aria-hidden]"));
  }
  told.list.append(holder);
  seen.observe(made.element);
  places.set(arm.name, {
    ...made, holder, told: null, at: 0, epoch: link.epoch, state: "none",
    isSeen: true, isUnknown: !isStored, isDirty: true, ...early.get(arm.name) });
  early.delete(arm.name);
  writeOne(places.get(arm.name), arm.name);
}

/** Follow the live poses of all arms, as the address says. */
function listen() {
  link.stop();
  const { frame, units } = choice;
  const path = withQuery("/v1/live/stream", { nearest: 1, rate: 1000 / GAP_MS, frame, units });
  const stop = follow(path, {
    event: (name, data) => (name === "removed" ? list() : take(JSON.parse(data))),
    gone: (since) => {
      link.goneSince = since;
      gone(since);
      places.forEach(writeOne);
    },
    back: () => {
      Object.assign(link, { goneSince: null, epoch: link.epoch + 1, backAt: performance.now() });
      back();
      if (link.epoch > 1) list();
    },
    refused: (problem) => places.forEach((one) =>
      Object.assign(one, { told: { ok: false, problem: { say: problem.detail } }, epoch: link.epoch })),
  });
  link.stop = stop;
}

function take(answer) {
  const one = places.get(answer.arm.name);
  const news = { told: answer, at: performance.now(), epoch: link.epoch, isDirty: true };
  if (one) Object.assign(one, news);
  else {
    // Of an arm that is new here: the list is read again, unless that is under way.
    if (!choice.arms && !early.size && places.size) list();
    early.set(answer.arm.name, news);
  }
  if (!link.isWaiting) {
    link.isWaiting = true;
    setTimeout(() => requestAnimationFrame(draw), Math.max(link.drawAt + GAP_MS - performance.now(), 0));
  }
}

function draw(now) {
  Object.assign(link, { isWaiting: false, drawAt: now });
  for (const [name, one] of places) if (one.isDirty && one.isSeen) writeOne(one, name);
  if (places.size) ready();
}

/** Note which cards are on the screen: the others are written twice a second, with the ages. */
function look(entries) {
  for (const { target, isIntersecting } of entries) {
    const one = places.get(target.dataset.arm);
    if (one) one.isSeen = isIntersecting;
  }
}

function writeOne(one, name) {
  const now = performance.now();
  let [answer, why] = [one.told, ""];
  if (link.goneSince) why = say(WORDS.board.gone, { time: clock(link.goneSince) });
  else if (answer && one.epoch !== link.epoch) {
    // Told before the break: it may be over until it is told again.
    if (now - link.backAt > ANEW_MS) answer = one.told = null;
    else why = WORDS.board.anew;
  }
  const said = one.isUnknown
    ? { ...saidOf(null, 0, ""), state: "bad", word: WORDS.board.unknown }
    : saidOf(answer, now - one.at, why);
  one.write(said);
  one.isDirty = false;
  if (said.state !== one.state) {
    const state = said.word || WORDS.board[said.state];
    told.changes.set(name, say(WORDS.board.ears, { arm: name, state }));
  }
  one.state = said.state;
}

function tellEars() {
  if (!told.changes.size) return;
  const sentences = [...told.changes.values()];
  told.changes.clear();
  const many = sentences.length > 5;
  setText(told.ears, many ? say(WORDS.board.ears_many, { n: sentences.length }) : sentences.join(" "));
}

/** Tell the style how large cards are: all on the screen at once, where that leaves legible figures. */
function measure() {
  const count = told.list.childElementCount, { width, top } = told.list.getBoundingClientRect();
  if (!count || !(width > 0)) return;
  const caution = document.querySelector(".bare-caution").offsetHeight;
  const height = innerHeight - top - scrollY - BELOW_PX - caution;
  const isChosen = /^([1-9]|1\d|20)$/.test(choice.columns), isPrinted = matchMedia("print").matches;
  const asked = isChosen ? Number(choice.columns) : isPrinted ? PRINTED_COLUMNS : 0;
  const { columns, figure, words, high } = cardsFitted(count, width, isPrinted ? 0 : height, asked);
  const sizes = {
    columns, figure: `${figure.toFixed(1)}px`, letters: `${words.toFixed(1)}px`, high: `${high}px` };
  for (const [name, size] of Object.entries(sizes)) told.list.style.setProperty(`--${name}`, size);
}

function fitChoices() {
  const select = (name, label, options) => {
    const now = choice[name];
    const known = options.some(([value]) => value === now) ? options : [...options, [now, now]];
    const box = el("select", { onchange: () => chose(name, box.value) },
      known.map(([value, text]) => el("option", { value, selected: value === now }, text)));
    return el("label", {}, label, box);
  };
  const units = UNITS.map((name) => [name, name]);
  const columns = ["1", "2", "3", "4", "5", "6", "8", "10"].map((n) => [n, n]);
  fill(
    document.getElementById("choices"),
    select("frame", WORDS.board.frame_choice,
      [["base", WORDS.board.base], ["world", WORDS.board.world]]),
    select("units", WORDS.board.units_choice, [["", WORDS.board.units_own], ...units]),
    select("columns", WORDS.board.columns_choice, [["", WORDS.board.columns_auto], ...columns]),
  );
}

function chose(name, value) {
  choice[name] = value;
  choose({ [name]: name === "frame" && value === "base" ? "" : value });
  if (name === "columns") return measure();
  places.clear();
  told.list.replaceChildren();
  list().then(listen);
}
