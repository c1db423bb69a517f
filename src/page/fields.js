// Fields for numbers, words and units, each with the path of what it stands for in the question.

import { all, el, fresh, one } from "./dom.js";
import { typed } from "./numbers.js";

/** The table of units, by quantity. */
export const units = {};

export async function loadUnits() {
  const rows = await (await fetch("/v1/units")).json();
  for (const row of rows) (units[row.quantity] ??= []).push(row);
}

/** A choice of unit. All choices of one quantity are one: they change together. */
export function unitChoice(quantity, label) {
  const options = units[quantity].map((unit) => el("option", { value: unit.code, title: unit.name }, unit.code));
  const select = el("select", { "aria-label": label ?? `unit of ${quantity.replace("_", " ")}`, data: { unit: quantity } }, ...options);
  const other = one(`select[data-unit="${quantity}"]`);
  if (other) select.value = other.value;
  select.addEventListener("input", () => {
    for (const same of all(`select[data-unit="${quantity}"]`)) same.value = select.value;
  });
  return select;
}

/** The units chosen in `root`, but for those that are the SI unit anyway. */
export function chosenUnits(root) {
  const chosen = {};
  for (const select of all("select[data-unit]", root)) {
    if (select.value !== units[select.dataset.unit][0].code) chosen[select.dataset.unit] = select.value;
  }
  return chosen;
}

/** Some numbers in a row, with a name above and a unit behind. */
export function numbers({ label, path, names, unit, values = [], hint }) {
  const inputs = names.map((name, i) => {
    const id = fresh();
    const own = Array.isArray(path) ? path[i] : names.length > 1 ? `${path}/${i}` : path;
    const input = el("input", {
      id, type: "text", inputMode: "text", autocomplete: "off", spellcheck: false, value: values[i] ?? "", data: { path: own },
    });
    input.setAttribute("aria-label", names.length > 1 ? `${label}, ${name}` : label);
    return names.length > 1 ? el("span", { className: "part" }, el("label", { htmlFor: id, "aria-hidden": "true" }, name), input) : input;
  });
  const group = el("div", { className: "field", role: "group", "aria-label": label },
    el("span", { className: "label", "aria-hidden": "true" }, label),
    el("span", { className: "row" }, ...inputs, unit ? unitChoice(unit) : null),
    hint ? el("span", { className: "hint" }, hint) : null);
  if (!Array.isArray(path)) group.dataset.group = path;
  return group;
}

/** One of a few words; a `flag` is yes or no, said in words. */
export function choice({ label, path, options, value, hint, flag = false }) {
  const id = fresh();
  const select = el("select", { id, data: path ? { path } : {} }, ...options.map(([code, words]) => el("option", { value: code }, words)));
  if (value !== undefined) select.value = value;
  if (flag) select.dataset.flag = "";
  return el("div", { className: "field" }, el("label", { htmlFor: id, className: "label" }, label), select,
    hint ? el("span", { className: "hint" }, hint) : null);
}

/** A short text. */
export function words({ label, path, value, hint }) {
  const id = fresh();
  const input = el("input", { id, type: "text", autocomplete: "off", spellcheck: false, value, data: { path, words: "" } });
  return el("div", { className: "field" }, el("label", { htmlFor: id, className: "label" }, label), input,
    hint ? el("span", { className: "hint" }, hint) : null);
}

/** What the fields in `root` say, as a tree: the path `a/0` is the first item of `a`. */
export function read(root) {
  const tree = {};
  for (const field of all("[data-path]", root)) {
    if (field.closest("[hidden]")) continue;
    const flag = field.type === "checkbox" ? field.checked : "flag" in field.dataset ? field.value === "true" : null;
    if (flag === false) continue;
    const value = flag ? true
      : field.tagName === "SELECT" || "words" in field.dataset ? field.value
      : typed(field.value);
    put(tree, field.dataset.path.split("/"), value);
  }
  return tree;
}

function put(tree, path, value) {
  const last = path.pop();
  let at = tree;
  path.forEach((name, i) => {
    const next = path[i + 1] ?? last;
    at = at[name] ??= /^\d+$/.test(next) ? [] : {};
  });
  at[last] = value;
}

/** Whether a value holds nothing that was typed. */
export function empty(value) {
  if (Array.isArray(value)) return value.every(empty);
  if (value && Object.getPrototypeOf(value) === Object.prototype) return Object.values(value).every(empty);
  return value === null || value === undefined || value === "";
}
