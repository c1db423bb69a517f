// The answer: numbers as far as they are known, the invariants, the way as one, and notices.

import { all, el, one } from "./dom.js";
import { rounded } from "./numbers.js";
import { units } from "./fields.js";

const C = 299792458;
const length = (v) => (v.includes(null) ? null : Math.hypot(...v));

/** Shows an answer to a question; `full` asks for all digits. */
export function showAnswer(question, answer, full) {
  one("#answer-fields").replaceChildren(fields(answer, full));
  one("#invariants").replaceChildren(invariants(question, answer, full));
  one("#net").replaceChildren(net(question, answer.net, full));
  // A table wider than its place is scrolled, for which the keyboard must reach it.
  for (const place of all(".wide")) place.tabIndex = place.scrollWidth > place.clientWidth ? 0 : -1;
  one("#notices").replaceChildren(...answer.notices.map((notice) => el("li", {}, notice.detail)));
}

/** The answer in one sentence, for screen readers and as the text of its picture. */
export function sentence(answer) {
  const vector = (field) => `(${answer[field].map((x, i) => rounded(x, answer.uncertainty?.[field][i])).join(", ")}) ${answer.units[field]}`;
  return `E′ is ${vector("e")}, B′ is ${vector("b")}.`;
}

function table(caption, head, rows) {
  const cell = (words, i) => (i === 0 ? el("th", { scope: "row" }, words) : el("td", {}, words));
  return el("table", {}, el("caption", {}, caption),
    el("thead", {}, el("tr", {}, ...head.map((words) => (words ? el("th", { scope: "col" }, words) : el("td"))))),
    el("tbody", {}, ...rows.map((row) => el("tr", {}, ...row.map(cell)))));
}

function fields(answer, full) {
  const show = (x, u) => (x === null ? "missing" : full ? String(x) + (u ? ` ± ${u}` : "") : rounded(x, u));
  const column = (field) => {
    const values = [...answer[field], length(answer[field])];
    const known = answer.uncertainty ? [...answer.uncertainty[field], answer.uncertainty.magnitudes[field]?.uncertainty] : [];
    return values.map((x, i) => show(x, known[i]));
  };
  const [e, b] = [column("e"), column("b")];
  const known = answer.uncertainty ? "; ± is one standard uncertainty" : "";
  return table(`In the target frame${known}`, ["", `E′, ${answer.units.e}`, `B′, ${answer.units.b}`],
    ["x", "y", "z", "length"].map((name, i) => [name, e[i], b[i]]));
}

/** E²−c²B² and E·cB in V²/m², computed here from doubles. */
function invariantsOf(e, b, unit) {
  if ([...e, ...b].includes(null)) return [null, null];
  const scale = (v, quantity, code, by) => v.map((x) => x * by * units[quantity].find((row) => row.code === code).si_factor);
  const [electric, magnetic] = [scale(e, "e", unit.e, 1), scale(b, "b", unit.b, C)];
  const dot = (p, q) => p.reduce((sum, x, i) => sum + x * q[i], 0);
  return [dot(electric, electric) - dot(magnetic, magnetic), dot(electric, magnetic)];
}

function invariants(question, answer, full) {
  const found = answer.invariants;
  if (!found) return el("p", { className: "hint" }, "The invariants need all six components of the reading.");
  const after = invariantsOf(answer.e, answer.b, answer.units);
  const show = (x) => (x === null ? "out of range" : full ? String(x) : rounded(x));
  const words = {
    electric: "electric: E outweighs cB in every frame", magnetic: "magnetic: cB outweighs E in every frame",
    null: "null: E and cB are equal and perpendicular in every frame", zero: "zero",
    balanced: "balanced: E and cB are equal in every frame, but not perpendicular",
  };
  return el("div", {},
    table("Same in every frame, V²/m²", ["", "as read", "in the target"], [
      ["E² − c²B²", show(found.e2_minus_c2b2), show(after[0])],
      ["E · cB", show(found.e_dot_cb), show(after[1])],
    ]),
    el("p", { className: "hint" }, `The field is ${words[found.kind]}. From the reading to the answer the two change by `
      + `${rounded(found.residual)} of E² + c²B², which is rounding.`));
}

function net(question, net, full) {
  const show = (x) => (full ? String(x) : rounded(x));
  const vector = (v) => `(${v.map(show).join(", ")})`;
  const { w, x, y, z } = net.rotation;
  const angle = 2 * Math.atan2(Math.hypot(x, y, z), w) * (180 / Math.PI);
  const rows = [
    ["velocity", `${vector(net.velocity)} ${question.units?.velocity ?? "m/s"}`],
    ["over c", vector(net.beta)], ["γ", show(net.gamma)], ["rapidity", show(net.rapidity)],
    ["then a turn by", `${show(angle)}°`], ["as quaternion w, x, y, z", vector([w, x, y, z])],
  ];
  if (net.wigner_angle) rows.push(["of which Thomas–Wigner", `${show(net.wigner_angle)} rad`]);
  return table("The whole way as one motion and one turn", ["", "seen from the reading"], rows);
}
