// The way to the target frame: steps, each a motion or a turn in one of its forms.

import { all, el, one } from "./dom.js";
import { choice, empty, numbers, read, words } from "./fields.js";

const XYZ = ["x", "y", "z"];
const vector = (label, path, unit, values, hint) => ({ kind: numbers, label, path, names: XYZ, unit, values, hint });
const number = (label, path, unit, hint) => ({ kind: numbers, label, path, names: [label], unit, hint });
const direction = () => vector("direction", "direction", null, ["1", "0", "0"], "any length");

const PARTICLES = [
  ["electron", "electron"], ["muon", "muon"], ["proton", "proton"], ["deuteron", "deuteron"], ["alpha", "alpha particle"],
];

/** Every form of a step: its name for people, and its fields. */
const FORMS = {
  boost: {
    velocity: ["velocity", vector("velocity", "velocity", "velocity", ["", "0", "0"])],
    beta: ["velocity as part of c", vector("velocity over c", "beta", null, ["", "0", "0"])],
    speed: ["direction and speed over c", direction(), number("speed over c (β)", "beta")],
    gamma: ["direction and γ", direction(), number("Lorentz factor γ", "gamma", null, "1 or more")],
    rapidity: ["direction and rapidity", direction(), number("rapidity", "rapidity")],
    kinetic_energy: ["direction and kinetic energy", direction(), number("kinetic energy", "kinetic_energy", "energy"),
      { kind: choice, label: "of a", path: "particle", options: PARTICLES }],
    rest_energy: ["direction, kinetic and rest energy", direction(), number("kinetic energy", "kinetic_energy", "energy"),
      number("rest energy", "particle/rest_energy", "energy")],
    angular_velocity: ["point of a turning body", vector("angular velocity", "angular_velocity", "angular_velocity", ["0", "0", ""]),
      vector("place of the point, from the axis", "position", "length", ["", "0", "0"])],
  },
  rotate: {
    axis: ["axis and angle", vector("axis", "axis", null, ["0", "0", "1"], "any length"), number("angle", "angle", "angle", "right-hand rule")],
    quaternion: ["quaternion", { kind: numbers, label: "quaternion w + xi + yj + zk", path: ["w", "x", "y", "z"].map((n) => `quaternion/${n}`), names: ["w", "x", "y", "z"] }],
    matrix: ["matrix", ...[0, 1, 2].map((i) => vector(`new ${XYZ[i]} axis on the old axes`, `matrix/${i}`))],
    euler: ["three angles in a row", { kind: words, label: "axes, in order", path: "euler/axes", value: "zyx" },
      { kind: numbers, label: "angles", path: "euler/angles", names: ["first", "second", "third"], unit: "angle" },
      { kind: choice, label: "about axes that", path: "euler/about", options: [["moving", "turn along"], ["fixed", "stay fixed"]] }],
  },
};

/** The fields of what is uncertain about a form of a step. */
function uncertain(kind, form) {
  if (kind === "rotate") return [vector("small turns about the new axes", "uncertainty", "angle")];
  if (form === "velocity") return [vector("of the velocity", "uncertainty", "velocity")];
  if (form === "beta") return [vector("of the velocity over c", "uncertainty")];
  if (form === "angular_velocity") {
    return [vector("of the angular velocity", "uncertainty/angular_velocity", "angular_velocity"),
      vector("of the place of the point", "uncertainty/position", "length")];
  }
  return [number("of the speed, as it is given", "uncertainty/value"), number("of the direction", "uncertainty/direction", "angle")];
}

const TITLES = { boost: "Motion", rotate: "Turn" };
const SIDES = {
  boost: { label: "this is the motion of the", path: "inverse", flag: true, options: [
    ["false", "target, seen from the reading"], ["true", "reading, seen from the target"]] },
  rotate: { label: "this turn carries the axes of the", path: "inverse", flag: true, options: [
    ["false", "reading onto those of the target"], ["true", "target onto those of the reading"]],
    hint: "a reported attitude carries ground axes onto the body's: take the second for readings on the body" },
};

/** Adds an empty step and gives it. */
export function addStep(list, kind, form = Object.keys(FORMS[kind])[0]) {
  const options = Object.entries(FORMS[kind]).map(([name, [label]]) => [name, label]);
  const forms = choice({ label: "given as", options, value: form });
  const body = el("div", { className: "body" });
  const button = (label, words, action) => el("button", { type: "button", className: "small", title: words, "aria-label": words, onclick: action }, label);
  const step = el("li", { className: "step", data: { kind } },
    el("fieldset", {}, el("legend", {}, TITLES[kind]), forms, body,
      choice(SIDES[kind]),
      el("div", { className: "tools" },
        button("Earlier", "move this step earlier", () => swap(step, step.previousElementSibling, step)),
        button("Later", "move this step later", () => swap(step, step, step.nextElementSibling)),
        button("Remove", "remove this step", () => remove(step)))));
  const fill = () => {
    step.dataset.form = one("select", forms).value;
    const [, ...fields] = FORMS[kind][step.dataset.form];
    const make = ({ kind: field, ...its }) => field(its);
    body.replaceChildren(...fields.map(make),
      el("details", {}, el("summary", {}, "Standard uncertainty"), ...uncertain(kind, step.dataset.form).map(make)));
  };
  one("select", forms).addEventListener("input", fill);
  list.append(step);
  fill();
  return step;
}

function swap(step, after, before) {
  if (!after || !before) return;
  before.after(after);
  changed(step);
}

function remove(step) {
  const list = step.parentElement;
  const next = step.nextElementSibling ?? step.previousElementSibling;
  step.remove();
  changed(list);
  (one("select, input", next ?? document.createElement("p")) ?? one("#add-boost")).focus();
}

const changed = (at) => at.dispatchEvent(new Event("input", { bubbles: true }));

/** The steps as they stand in a question. */
export const readSteps = (list) => all(".step", list).map((step) => {
  const { uncertainty, ...content } = read(step);
  return { [step.dataset.kind]: empty(uncertainty) ? content : { ...content, uncertainty } };
});

/** Whether a step still lacks a number. */
export const unfinished = (step) =>
  all("input[data-path]", step).some((input) => !input.dataset.path.startsWith("uncertainty") && empty(input.value));

/** Rebuilds the steps of a question. */
export function loadSteps(list, steps) {
  list.replaceChildren();
  for (const entry of steps) {
    const [[kind, content]] = Object.entries(entry);
    const form = formOf(kind, content);
    if (form === undefined) throw new Error(`a step is ${kind}, not boost or rotate`);
    const step = addStep(list, kind, form);
    for (const field of all("[data-path]", step)) {
      const value = field.dataset.path.split("/").reduce((at, name) => at?.[name], content);
      if ("flag" in field.dataset) field.value = String(value === true);
      else if (value !== undefined && typeof value !== "object") field.value = value;
    }
  }
}

function formOf(kind, content) {
  if (kind === "rotate") return Object.keys(FORMS.rotate).find((form) => form in content) ?? "axis";
  if (kind !== "boost") return undefined;
  if (!("direction" in content)) return ["beta", "angular_velocity"].find((form) => form in content) ?? "velocity";
  if (typeof content.particle === "object" && content.particle) return "rest_energy";
  return ["gamma", "rapidity", "kinetic_energy"].find((form) => form in content) ?? "speed";
}
