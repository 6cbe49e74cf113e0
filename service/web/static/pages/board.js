// The board: a card for each arm at a fixed place, written at most ten times a second.
// Places: as the address says (arms=a,b,-,c; a dash leaves one empty), else by name; while the page is
// open nobody moves: new arms come last, removed ones leave their place empty.
// Left out: what a card says (board_words.js) and its elements (card.js).
import { choose, chosen, withQuery } from "./address.js";
import { ask, follow } from "./ask.js";
import { saidOf } from "./board_words.js";
import { card } from "./card.js";
import { el, fill, setText } from "./elements.js";
import { clock, UNITS } from "./numbers.js";
import { back, begin, gone, ready } from "./shell.js";
import { say, WORDS } from "./words.js";

const GAP_MS = 100;
const AGES_MS = 500;
const NARROW_PX = 430; // Below it, titles of two lines are the rule.
const NOBODY_MS = 600; // Who has told nothing by then keeps nobody waiting.
const TIGHT_PX = 250; // Below it, what stood side by side stands one under the other.
const LIST_MS = 30000;
const TELL_MS = 4000; // Ears are told of changed states in turns, not ten times a second.
const ANEW_MS = 1500; // After a break all arms are told anew; who is not has no values.

const early = new Map(); // answers about arms that have no place yet
const places = new Map(); // name -> {card, told, at, epoch, state}
const told = { list: document.getElementById("cards"), ears: document.getElementById("told"), changes: new Map() };
const link = { stop: () => {}, goneSince: null, epoch: 0, backAt: -Infinity, drawAt: 0, isWaiting: false };
const seen = new IntersectionObserver(look, { rootMargin: "200px" });
const choice = chosen({ frame: "base", units: "", columns: "", arms: "" });

begin();
fitChoices();
new ResizeObserver(measure).observe(told.list);
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
  setText(document.getElementById("count"), say(WORDS.board[arms.length === 1 ? "count_one" : "count"], { n: arms.length }));
  if (!told.list.childElementCount) fill(told.list, el("li", {}, WORDS.board.empty));
}

function blankBox() {
  return el("div", { class: "blank" });
}

function blank() {
  return el("li", { "aria-hidden": "true" }, blankBox());
}

function place(arm, isStored) {
  const made = card(arm, withQuery("", { frame: choice.frame === "base" ? "" : choice.frame, units: choice.units }));
  const holder = el("li", {}, made.element);
  if (!places.size && !told.list.querySelector("article")) told.list.replaceChildren(...told.list.querySelectorAll("[aria-hidden]"));
  told.list.append(holder);
  seen.observe(made.element);
  places.set(arm.name, { ...made, holder, told: null, at: 0, epoch: link.epoch, state: "none", isSeen: true, isUnknown: !isStored, isDirty: true, ...early.get(arm.name) });
  early.delete(arm.name);
  writeOne(places.get(arm.name), arm.name);
}

/** Follow the live poses of all arms, as the address says. */
function listen() {
  link.stop();
  const path = withQuery("/v1/live/stream", { nearest: 1, rate: 1000 / GAP_MS, frame: choice.frame, units: choice.units });
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
    refused: (problem) => places.forEach((one) => Object.assign(one, { told: { ok: false, problem: { say: problem.detail } }, epoch: link.epoch })),
  });
  link.stop = stop;
}

function take(answer) {
  const one = places.get(answer.arm.name);
  const news = { told: answer, at: performance.now(), epoch: link.epoch, isDirty: true };
  if (one) Object.assign(one, news);
  else if (!choice.arms) {
    // Of an arm that is new here: the list is read again, unless that is under way.
    if (!early.size && places.size) list();
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
  const said = one.isUnknown ? { ...saidOf(null, 0, ""), state: "bad", word: WORDS.board.unknown } : saidOf(answer, now - one.at, why);
  one.write(said);
  one.isDirty = false;
  if (said.state !== one.state) told.changes.set(name, say(WORDS.board.ears, { arm: name, state: said.word || WORDS.board[said.state] }));
  one.state = said.state;
}

function tellEars() {
  if (!told.changes.size) return;
  const sentences = [...told.changes.values()];
  told.changes.clear();
  setText(told.ears, sentences.length > 5 ? say(WORDS.board.ears_many, { n: sentences.length }) : sentences.join(" "));
}

/** Tell the style how wide a card is. */
function measure() {
  const width = parseFloat(getComputedStyle(told.list).gridTemplateColumns);
  if (!(width > 0)) return;
  told.list.style.setProperty("--cw", `${(width / 100).toFixed(3)}px`);
  told.list.toggleAttribute("data-narrow", width < NARROW_PX);
  told.list.toggleAttribute("data-tight", width < TIGHT_PX);
}

function fitChoices() {
  const select = (name, label, options) => {
    const known = options.some(([value]) => value === choice[name]) ? options : [...options, [choice[name], choice[name]]];
    const box = el("select", { onchange: () => chose(name, box.value) }, known.map(([value, text]) => el("option", { value, selected: value === choice[name] }, text)));
    return el("label", {}, label, box);
  };
  const units = UNITS.map((name) => [name, name]);
  const columns = ["1", "2", "3", "4", "5", "6", "8", "10"].map((n) => [n, n]);
  fill(
    document.getElementById("choices"),
    select("frame", WORDS.board.frame_choice, [["base", WORDS.board.base], ["world", WORDS.board.world]]),
    select("units", WORDS.board.units_choice, [["", WORDS.board.units_own], ...units]),
    select("columns", WORDS.board.columns_choice, [["", WORDS.board.columns_auto], ...columns]),
  );
  fitColumns();
}

function fitColumns() {
  const columns = /^([1-9]|1\d|20)$/.test(choice.columns) ? choice.columns : "";
  if (columns) told.list.style.setProperty("--columns", columns);
  else told.list.style.removeProperty("--columns");
  measure();
}

function chose(name, value) {
  choice[name] = value;
  choose({ [name]: name === "frame" && value === "base" ? "" : value });
  if (name === "columns") return fitColumns();
  places.clear();
  told.list.replaceChildren();
  list().then(listen);
}
