// Faults beside the fields that caused them, in the words of the problem document.

import { all, el, fresh, one } from "./dom.js";

/** Takes all faults away. */
export function clearFaults(root) {
  for (const fault of all(".fault", root)) fault.remove();
  for (const field of all("[aria-invalid]", root)) {
    field.removeAttribute("aria-invalid");
    field.removeAttribute("aria-describedby");
  }
}

/** Puts the faults of a problem where they belong; what belongs to no field goes to `rest`. */
export function showFaults(problem, root, rest) {
  const faults = problem.errors.length ? problem.errors : [{ ...problem, code: (problem.type ?? "").split("/").pop() }];
  for (const fault of faults) {
    const path = fault.pointer !== undefined ? fault.pointer.split("/").slice(1) : (fault.parameter ?? "").split(".");
    const field = find(path.filter((name) => name !== ""), root) ?? (fault.code === "number_out_of_range" ? tooLarge(root) : null);
    const id = fresh();
    const note = el("p", { className: "fault", id }, sentence(fault.detail));
    if (!field) {
      rest.append(note);
      continue;
    }
    (field.closest(".field") ?? field).append(note);
    for (let at = field.closest("details"); at; at = at.parentElement.closest("details")) at.open = true;
    const inputs = field.matches("input, select") ? [field] : all("input:not([type=checkbox])", field);
    for (const input of inputs) {
      input.setAttribute("aria-invalid", "true");
      input.setAttribute("aria-describedby", id);
    }
  }
}

const sentence = (text) => `${text[0].toUpperCase()}${text.slice(1)}.`.replace(/\.\.$/, ".");

/** The field with a number that no double can hold; the service cannot tell its place. */
const tooLarge = (root) => all("input[data-path]", root).find((input) => Math.abs(Number(input.value)) === Infinity);

/** The field of a path, or the nearest one around it. */
function find(path, root) {
  let scope = root;
  let rest = path;
  if (path[0] === "units" || path[0] === "answer_units") {
    return one(path[0] === "units" ? `select[data-unit="${path[1]}"]` : "#answer-units select", root);
  }
  if (path[0] === "steps" && path.length > 1) {
    scope = all(".step", root)[Number(path[1])];
    rest = path.slice(3);
    if (!scope) return null;
  }
  for (let end = rest.length; end > 0; end -= 1) {
    const name = CSS.escape(rest.slice(0, end).join("/"));
    const found = one(`[data-path="${name}"], [data-group="${name}"]`, scope);
    if (found && !found.closest("[hidden]")) return found;
  }
  return scope === root ? null : one(".body", scope);
}
