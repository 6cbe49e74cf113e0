// The signs of what is told of a place: the same on the page and on the drawing.
// Idea: told apart by shape alone, also where they are small, many and without colour. Left out: words.

/** By what is told (reach_list.js, `kindOf`), in the order of the counts; in a square of 20. */
export const SIGNS = {
  reachable: "M5 10a5 5 0 1 0 10 0a5 5 0 1 0 -10 0M9.5 10h1",
  care: "M5 10a5 5 0 1 0 10 0a5 5 0 1 0 -10 0M1 10H19",
  "outside-travel": "M10 4L16 15H4Z",
  unreachable: "M5 5L15 15M15 5L5 15",
  "not-found": "M10 1L19 10L10 19L1 10ZM8 8.4a2 1.9 0 1 1 2.8 1.6q-.8.4-.8 1.6M10 13.6v.4",
  refused: "M4 7H16M4 13H16",
  unread: "M5 3V17M9 3V17",
};
/** More places than these have no numbers beside them on the drawing. */
export const NUMBERED = 40;
const OPEN = "M10 7v6M7 10h6";

/** A point of the paper, or the nearest on the edge of its view. */
const within = ([x, y], { left, top, right, bottom }) =>
  [Math.min(Math.max(x, left + 6), right - 6), Math.min(Math.max(y, top + 6), bottom - 6)];

/** Where a place is seen: on its point, or short of the edge beyond which it lies, and then which way. */
export function seenAt(at, frame) {
  const edge = within(at, frame), off = edge.map((one, i) => at[i] - one), far = Math.hypot(...off);
  if (far < 1) return { on: edge, way: null };
  const way = off.map((one) => one / far);
  return { on: edge.map((one, i) => one - 16 * way[i]), way };
}

/** Point from a sign to the place itself; letters keep off. */
export function beyond(drawn, labels, { on, way }) {
  const [from, to] = [9, 20].map((far) => on.map((one, i) => one + far * way[i]));
  drawn.arrow(from, to, "medium", 7);
  labels.keepLine([from, to], 5);
}

/** Stroke a sign in ink, or the paper that keeps it clear of the lines below. */
export function stroke({ context, colour }, [x, y], verdict, size, name) {
  const pixels = name === "paper" ? 4 : size > 8 ? 1.2 + size / 40 : 1;
  context.save();
  context.translate(x - size / 2, y - size / 2);
  context.scale(size / 20, size / 20);
  context.setLineDash([]);
  context.lineWidth = (pixels * 20) / size;
  context.strokeStyle = colour(name);
  context.stroke(new Path2D(SIGNS[verdict] ?? OPEN));
  context.restore();
}

/**
 * Draw the signs of other places, none of them wiped out by the paper of another. Of many that
 * would lie on one another one stands for all, and never a good one for a bad one.
 * @param {{on: number[], verdict: string}[]} places @param {boolean} all each is drawn
 */
export function marks(drawn, places, all) {
  const size = all ? 12 : 8;
  const shown = all ? places : oneEach(places, size);
  for (const name of ["paper", "ink"]) for (const { on, verdict } of shown) {
    stroke(drawn, on, verdict, size, name);
  }
}

function oneEach(places, size) {
  const cells = new Map();
  for (const one of places) {
    const key = one.on.map((part) => Math.round(part / size)).join(" ");
    if (!cells.has(key) || cells.get(key).verdict === "reachable") cells.set(key, one);
  }
  return [...cells.values()];
}
