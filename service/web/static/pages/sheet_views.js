// The three views of a sheet: elevation, plan below it (first angle), and one that can be turned.
// Idea: elevation and plan share scale and middle, so places stand below each other; the scale stays
// while the arm moves and changes only when something would leave the paper.
// Left out: what is drawn of an arm (arm_drawing.js), and where its numbers come from (sheet.js).
import { boxOf, drawArm, thicknessOf } from "./arm_drawing.js";
import { choose, chosen } from "./address.js";
import { setAttribute } from "./elements.js";
import { firstAngle, scaleBar, triad, labelsOn } from "./marks.js";
import { length, number } from "./numbers.js";
import { pen } from "./pen.js";
import { column, fitted, holds, MM_IN, placed, roundLength, view } from "./projection.js";
import { say, WORDS } from "./words.js";

const MARGIN = { x: 44, y: 40, right: 52, bottom: 52 };
const ARROW = 50; // beyond the margins, pixels: what the arrows of a lost motion take round the tool
const TOLD_MS = 5000; // A screen reader is not told more often.
const ORIGIN = [0, 0, 0];
const DEGREE = Math.PI / 180;
const FIRST_TURN = "-32,22";
const FIXED = ["elevation", "plan"];
const PRINTED_RATIO = 3; // pixels for one of CSS: 288 to the inch

/**
 * Return what shows scenes on three canvases.
 * @param {{elevation: HTMLCanvasElement, plan: HTMLCanvasElement, free: HTMLCanvasElement}} canvases
 * @param {(scale: string) => void} onScale
 */
export function views(canvases, onScale) {
  const pens = Object.fromEntries(Object.entries(canvases).map(([name, one]) => [name, pen(one)]));
  const [yaw, pitch] = chosen({ turn: FIRST_TURN }).turn.split(",").map(Number);
  const state = {
    pens, onScale, scene: null, box: null, freeBox: null, yaw: yaw || 0, pitch: pitch || 0, told: 0,
    dirty: new Set() };
  const repaint = (...names) => request(state, names.length ? names : Object.keys(pens));
  fitTurning(state, canvases.free, repaint);
  new ResizeObserver(() => repaint()).observe(canvases.elevation);
  return {
    show(scene) {
      state.scene = scene;
      repaint();
    },
    forget: () => (state.box = state.freeBox = null),
    retint() {
      for (const [name, one] of Object.entries(pens)) {
        one.canvas.dataset.ratio = matchMedia("print").matches ? PRINTED_RATIO : "";
        one.tint();
        state.dirty.add(name);
      }
      paint(state); // At once: a printer waits for no frame.
    },
  };
}

function request(state, names) {
  if (!state.dirty.size) requestAnimationFrame(() => paint(state));
  for (const name of names) state.dirty.add(name);
}

function paint(state) {
  const { scene, dirty, pens } = state;
  const names = new Set(dirty);
  dirty.clear();
  if (!scene) return;
  for (const name of names) pens[name].begin();
  forgetOtherPaper(state);
  holdBox(state);
  if (names.has("elevation") || names.has("plan")) paintFixed(state);
  if (names.has("free")) paintFree(state);
  tell(state);
}

/** On paper of another size (a phone turned, a printer) what was held for the last one is of no use. */
function forgetOtherPaper(state) {
  const [elevation, plan, free] = ["elevation", "plan", "free"].map((name) => state.pens[name].canvas);
  const size = [elevation.clientWidth, elevation.clientHeight + plan.clientHeight, free.clientWidth,
    free.clientHeight].join();
  if (state.paper !== size) state.box = state.freeBox = null;
  state.paper = size;
}

/** Keep the boxes while all has room in them; else take some with room to spare. */
function holdBox(state) {
  const { scene } = state, foot = column(scene.outline.base, 3);
  const free = [[foot[0], foot[1], floorOf(scene)]];
  state.freeBox = held(state.freeBox, scene, free, (box) => freePx(state, box));
  const box = held(state.box, scene, [ORIGIN], (one) => fixedPx(state, one));
  if (box === state.box) return;
  state.box = box;
  shareHeight(state, box);
}

/** A box that holds a scene and other places; arrows, which are as long on paper at any scale, too. */
function held(box, scene, others, pxOf) {
  const tool = column(scene.outline.tool, 3), lost = scene.singularity?.lost_motion.length;
  const round = (one) => {
    const pad = lost ? ARROW / pxOf(one) : 0;
    return [...others, tool.map((part) => part - pad), tool.map((part) => part + pad)];
  };
  const hasRoom = (one) => holds(one, boxOf(scene, 0, round(one)));
  if (box && hasRoom(box)) return box;
  let wide = boxOf(scene, 0.05, others);
  // The larger the box, the smaller the scale, and the longer the arrows in it.
  for (let turn = 0; turn < 8 && !hasRoom(wide); turn++) wide = boxOf(scene, 0.05, round(wide));
  return wide;
}

/** The heights of elevation and plan follow what they have to show, so that the scale can be large. */
function shareHeight({ pens }, box) {
  const [, y, z] = box[1].map((high, i) => high - box[0][i]);
  const share = Math.min(Math.max(z / (y + z), 0.36), 0.64).toFixed(3);
  const { style } = pens.plan.canvas.closest(".fixed");
  const rows = `minmax(0, ${share}fr) minmax(0, ${(1 - share).toFixed(3)}fr)`;
  if (style.gridTemplateRows === rows) return;
  style.gridTemplateRows = rows;
  for (const name of FIXED) pens[name].begin();
}

function fixedPx(state, box) {
  shareHeight(state, box);
  return Math.min(...FIXED.map((name) => fittedOn(state.pens[name], name, box, state.scene).px));
}

/** The height of the floor: the world's, or that of the arm's foot. */
const floorOf = (scene) => (scene.frameName === "world" ? 0 : scene.outline.base[2][3]);

function roomOf(one) {
  const [width, height] = one.size();
  const { x, y, right, bottom } = MARGIN;
  return { x, y, width: width - x - right, height: height - y - bottom };
}

const fittedOn = (one, name, box, scene, scale) =>
  fitted(view(name), box, roomOf(one), MM_IN[scene.unit], scale);

function paintFixed(state) {
  const { pens, scene, box } = state;
  const first = FIXED.map((name) => fittedOn(pens[name], name, box, scene));
  const scale = first[0].px < first[1].px ? first[0].scale : first[1].scale;
  let size;
  for (const name of FIXED) {
    const put = fittedOn(pens[name], name, box, scene, scale);
    corner(pens[name], put.view, scene);
    size ??= thicknessOf(put, scene.outline);
    drawn(pens[name], scene, () => {
      const sizes = scene.struck ? [] : dimensions(pens[name], put, scene, name, box);
      drawArm(pens[name], put, scene, { size, keep: [...sizes, ...furniture(pens[name], name)] });
    });
  }
  const [height, { bar, sign, most }] = [pens.plan.size()[1], feet(pens.plan)];
  scaleBar(pens.plan, bar, height - 12, scale.px, scene.unit, most);
  firstAngle(pens.plan, sign, height - 17, 8);
  state.onScale(scale.words);
}

/** Where scale bar and sign of projection stand at the foot of the plan, and how long the bar may be. */
function feet(one) {
  const bar = MARGIN.x + 90, sign = one.size()[0] - 56;
  return { bar, sign, most: Math.min(160, sign - bar - 48) };
}

/** Lines that labels keep off: through the axes in the corner, and what stands at the foot. */
function furniture(one, name) {
  const low = one.size()[1] - 16, { bar, sign, most } = feet(one);
  const axes = [[[26, low - 50], [26, low]], [[26, low - 24], [60, low - 24]]];
  if (name !== "plan") return axes;
  return [...axes, [[bar, low], [bar + most + 24, low]], [[sign, low], [sign + 36, low]]];
}

/** Which way the axes of the frame point that all is told in: in the corner, clear of the arm. */
function corner(one, looked, scene) {
  const at = placed(looked, 1, ORIGIN, 26, one.size()[1] - 40);
  triad(one, at, [[1, 0, 0, 0], [0, 1, 0, 0], [0, 0, 1, 0]], 24, labelsOn(one));
  one.letters(scene.frameName, 12, one.size()[1] - 12, { px: 11, colour: "quiet" });
}

/** Draw; what cannot be relied on is faint under a word that can be read across the hall. */
function drawn(one, scene, draw) {
  one.context.globalAlpha = scene.struck ? 0.5 : 1;
  draw();
  one.context.globalAlpha = 1;
  if (!scene.struck) return;
  const [width, height] = one.size(), px = Math.min(64, width / 8);
  one.letters(scene.struck.toUpperCase(), width / 2, height / 2, { px, weight: 700, align: "center" });
}

function dimensions(one, put, scene, name, box) {
  const tool = column(scene.outline.tool, 3), [width, height] = one.size();
  const [from, to, low, high] = [ORIGIN, tool, ...box].map(put);
  const x = Math.min(high[0] + 28, width - 12), y = Math.min(low[1] + 26, height - 12);
  const written = (i) => length(tool[i], scene.units);
  if (name === "plan") return [one.dimension(from, to, { x }, written(1))];
  return [one.dimension(from, to, { y }, written(0)), one.dimension(from, to, { x }, written(2))];
}

const freeView = ({ yaw, pitch }) => view("free", yaw * DEGREE, pitch * DEGREE);

/** The scale at which a box has room however it is turned about the vertical. */
function freePx(state, box) {
  const room = roomOf(state.pens.free), { up, toward } = freeView(state);
  const sides = box[1].map((high, i) => high - box[0][i]);
  const across = Math.hypot(sides[0], sides[1]);
  return Math.min(room.width / across, room.height / (sides[2] * up[2] + across * Math.abs(toward[2])));
}

function paintFree(state) {
  const { pens, scene, freeBox: box } = state, one = pens.free, room = roomOf(one);
  const looked = freeView(state), px = freePx(state, box);
  const middle = box[0].map((low, i) => (low + box[1][i]) / 2);
  const put = placed(looked, px, middle, room.x + room.width / 2, room.y + room.height / 2 + 8);
  drawn(one, scene, () => {
    floor(one, put, scene, box);
    drawArm(one, put, scene, { keep: furniture(one, "free") });
  });
  corner(one, looked, scene);
  const turned = { yaw: number(state.yaw, 0), pitch: number(state.pitch, 0) };
  // Paper cannot be dragged.
  const words = say(WORDS.sheet.turned, turned) + (matchMedia("print").matches ? "" : WORDS.sheet.turn_it);
  one.letters(words, one.size()[0] - 12, one.size()[1] - 12, { px: 11, colour: "quiet", align: "right" });
}

/** The floor through the arm's foot with a grid of round lengths, the arm's trace and a plumb line. */
function floor(one, put, scene, [low, high]) {
  const z = floorOf(scene), step = roundLength(0.35 * Math.max(high[0] - low[0], high[1] - low[1]), 1);
  const ends = [0, 1].map((i) => [Math.floor(low[i] / step) * step, Math.ceil(high[i] / step) * step]);
  for (let x = ends[0][0]; x <= ends[0][1] + step / 2; x += step) one.line(
    [put([x, ends[1][0], z]), put([x, ends[1][1], z])], "faint");
  for (let y = ends[1][0]; y <= ends[1][1] + step / 2; y += step) one.line(
    [put([ends[0][0], y, z]), put([ends[0][1], y, z])], "faint");
  one.line(scene.outline.line.map(([x, y]) => put([x, y, z])), "dashed");
  const tool = column(scene.outline.tool, 3);
  one.line([put(tool), put([tool[0], tool[1], z])], "chain");
  const corner = put([ends[0][1], ends[1][0], z]);
  const words = say(WORDS.sheet.grid, { length: step, unit: scene.unit }), [width, height] = one.size();
  // Wherever the corner lies, the words stay whole on the paper.
  const half = one.widthOf(words, 10) / 2 + 4, within = (at, least, most) =>
    Math.min(Math.max(at, least), most);
  one.letters(words, within(corner[0], half, width - half), within(corner[1] + 12, 10, height - 26),
    { px: 10, align: "center", colour: "quiet" });
}

function fitTurning(state, canvas, repaint) {
  let held = null;
  const turn = (yaw, pitch) => {
    state.yaw = ((((yaw + 180) % 360) + 360) % 360) - 180;
    state.pitch = Math.min(Math.max(pitch, -20), 89);
    repaint("free");
  };
  const keep = () => {
    const text = `${Math.round(state.yaw)},${Math.round(state.pitch)}`;
    choose({ turn: text === FIRST_TURN ? null : text });
  };
  canvas.addEventListener("pointerdown", (event) => {
    held = { x: event.clientX, y: event.clientY, yaw: state.yaw, pitch: state.pitch };
    canvas.setPointerCapture?.(event.pointerId);
  });
  canvas.addEventListener("pointermove", (event) => {
    if (held) turn(held.yaw - (event.clientX - held.x) * 0.5, held.pitch + (event.clientY - held.y) * 0.4);
  });
  for (const name of ["pointerup", "pointercancel"]) {
    canvas.addEventListener(name, () => {
      if (held) keep();
      held = null;
    });
  }
  canvas.addEventListener("keydown", (event) => {
    const step = event.shiftKey ? 15 : 5;
    const by = {
      ArrowLeft: [step, 0], ArrowRight: [-step, 0], ArrowUp: [0, step], ArrowDown: [0, -step] }[event.key];
    if (by) turn(state.yaw + by[0], state.pitch + by[1]);
    else if (event.key === "Home") turn(...FIRST_TURN.split(",").map(Number));
    else return;
    event.preventDefault();
    keep();
  });
}

function tell(state) {
  const now = performance.now();
  if (state.told && now - state.told < TOLD_MS) return;
  state.told = now;
  const { scene } = state, tool = column(scene.outline.tool, 3);
  const place = ["x", "y", "z"].map((axis, i) => `${axis} ${length(tool[i], scene.units)}`).join(", ");
  for (const [name, one] of Object.entries(state.pens)) {
    const words = say(WORDS.sheet[`${name}_told`], {
      arm: scene.arm, frame: scene.frameName, tool: scene.toolName, place: `${place} ${scene.unit}` });
    setAttribute(one.canvas, "aria-label", words);
  }
}
