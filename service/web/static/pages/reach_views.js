// Which two ways the drawing of the reach page looks, and how the paper is held.
// Idea: the interface tells its curves along axes of the base, but people stand in the world: a view is
// turned on the paper, a quarter at a time, until up is up, and what would be seen from below is seen
// from above. Left out: drawing them (reach_drawing.js).

import { column, cross, dot, moved, unit } from "./projection.js";

// Within 45 deg of the vertical one looks from above or below; never in both views.
const LEVEL = 0.71;
const less = (a) => a.map((one) => -one);

/**
 * @typedef {{kind: string, title: string, axes: number[][], across: number[], up: number[],
 *   toward: number[], axis?: object, looks?: number[]}} View
 *   title: a key of the words; axes: what the curves are told along; across, up: of the paper; looks: the
 *   way the section is looked at, where the plan tells where it is cut
 */

/** Return the two views: along the normal of the section's plane, and square to it. @returns {View[]} */
export function viewsOf({ envelope, chosen, outline, slides, vertical }) {
  const reach = envelope?.travel ?? envelope?.working_travel;
  const axis = envelope?.axis ?? (envelope || slides ? null : { point: [0, 0, 0], direction: [0, 0, 1] });
  const side = reach?.section.directions ?? [[1, 0, 0], [0, 0, 1]];
  const plan = reach?.plan.directions ?? [[1, 0, 0], [0, 1, 0]];
  if (!axis || (reach && reach.section.kind !== "section")) {
    return [held({ kind: "side", axes: side }, vertical), held({ kind: "plan", axes: plan }, vertical)];
  }
  const tool = outline ? column(outline.tool, 3) : null;
  const across = bearing(axis, chosen?.at ?? tool) ?? side[0];
  const section = held({ kind: "section", axes: [across, axis.direction], axis }, vertical);
  const above = held({ kind: "plan", axes: plan, axis }, vertical);
  return [section, { ...above, cut: across, looks: less(section.toward) }];
}

/** A view with its paper held as one stands before it, and what it is called then. */
function held(view, vertical) {
  const [right, ahead] = view.axes, toward = cross(right, ahead), rises = dot(toward, vertical);
  const isSection = view.kind === "section";
  if (Math.abs(rises) > LEVEL) {
    // A section keeps its sense, which the arrows in the plan tell.
    const isBelow = rises < 0 && !isSection;
    const paper = isBelow ? [less(right), ahead, less(toward)] : [right, ahead, toward];
    return named(view, isSection ? "section" : "plan", paper);
  }
  const turned = [[right, ahead], [ahead, less(right)], [less(right), less(ahead)], [less(ahead), right]];
  const rising = turned.map(([, up]) => dot(up, vertical)), upright = turned[rising.indexOf(Math.max(...rising))];
  return named(view, view.kind !== "plan" ? view.kind : view.axis ? "end_axis" : "end", [...upright, toward]);
}

const named = (view, title, [across, up, toward]) => ({ ...view, title, across, up, toward });

/** The direction from axis 1 to a place, square to the axis; null for a place on the axis. */
function bearing({ point, direction }, place) {
  if (!place) return null;
  const off = moved(place, point, -1);
  const level = moved(off, direction, -dot(off, direction));
  return Math.hypot(...level) > 1e-9 * Math.hypot(...off, 1) ? unit(level) : null;
}

/** A place as the view shows it: turned about axis 1 into the section, else as it stands. */
export function shown(view, place) {
  if (view.kind !== "section") return place;
  const { point, direction } = view.axis;
  const off = moved(place, point, -1), height = dot(off, direction);
  const radius = Math.hypot(...moved(off, direction, -height));
  return moved(moved(point, view.axes[0], radius), direction, height);
}

/** The curves of a view in the base. */
export function curves({ kind, axes, axis }, reach) {
  const flat = reach?.[kind === "plan" ? "plan" : "section"];
  const origin = kind === "section" ? axis.point : [0, 0, 0];
  return (flat?.curves ?? []).map(({ points }) =>
    points.map(([a, b]) => moved(moved(origin, axes[0], a), axes[1], b)));
}
