// A range: the same reading while one speed or angle of the way runs.

import { ask, forget, picture } from "./ask.js";
import { all, el, one } from "./dom.js";
import { chosenUnits, empty, read } from "./fields.js";
import { clearFaults, showFaults } from "./faults.js";
import { query } from "./numbers.js";

const panel = () => one("#range");

/** Keeps the list of quantities that can run equal to the steps there are. */
export function offer(question) {
  const select = one("#range-over");
  const before = select.value;
  const choices = (question.steps ?? []).flatMap((step, i) => {
    const nth = question.steps.length > 1 ? ` of step ${i + 1}` : "";
    if (step.boost && ["velocity", "beta", "direction"].some((name) => name in step.boost)) {
      return [[`${i} beta`, `speed over c (β)${nth}`], [`${i} rapidity`, `rapidity${nth}`]];
    }
    if (step.rotate && "axis" in step.rotate) return [[`${i} angle`, `angle${nth}`]];
    return [];
  });
  select.replaceChildren(...choices.map(([value, words]) => el("option", { value }, words)));
  if (choices.some(([value]) => value === before)) select.value = before;
  else if (choices.length) defaults();
  one("#range-none").hidden = choices.length > 0;
  one("#range-form").hidden = choices.length === 0;
}

/** Sensible ends for the quantity chosen. */
export function defaults() {
  const over = one("#range-over").value.split(" ")[1];
  const turn = chosenUnits(document).angle === "deg" ? "360" : "6.283185307179586";
  const [start, stop] = { beta: ["0", "0.99"], rapidity: ["0", "3"], angle: ["0", turn] }[over];
  one('[data-path="start"]').value = start;
  one('[data-path="stop"]').value = stop;
}

/** The question of the range: the way leaves out what runs. */
function ranged(question) {
  const [i, over] = one("#range-over").value.split(" ");
  const steps = question.steps.map((step, at) => {
    if (at !== Number(i)) return step;
    if (over === "angle") {
      const { angle, ...rest } = step.rotate;
      return { rotate: rest };
    }
    const { velocity, beta, direction, inverse } = step.boost;
    const uncertainty = kept(step.boost, over);
    return { boost: { direction: direction ?? velocity ?? beta, ...(inverse ? { inverse } : {}), ...(uncertainty ? { uncertainty } : {}) } };
  });
  return { ...question, steps, over, ...read(one("#range-form")) };
}

/** What still holds of the uncertainty of a motion as its speed runs: a value has that of the form it is given in. */
function kept({ direction, uncertainty, ...given }, over) {
  if (!direction || !uncertainty) return undefined;
  return over in given ? uncertainty : { direction: uncertainty.direction };
}

/** Whether something of the uncertainty of the step that runs is left out. */
function loses(question) {
  const [i, over] = one("#range-over").value.split(" ");
  const { boost } = question.steps[Number(i)];
  return Boolean(boost?.uncertainty) && (!boost.direction || !(empty(boost.uncertainty.value) || over in boost));
}

/** Draws the range of a question, when it is open and can be asked. */
export async function draw(question) {
  clearFaults(panel());
  const image = one("#range-picture");
  if (!panel().open || !question || one("#range-form").hidden) {
    forget("range");
    image.hidden = true;
    return;
  }
  one("#range-note").hidden = !loses(question);
  const { answer, problem } = await ask("range", address(question), { headers: { accept: "image/svg+xml" } });
  if (!answer && !problem) return;
  if (answer) picture(image, answer, `E and B in the target frame as the ${one("#range-over").selectedOptions[0].text} runs`);
  if (problem) {
    image.hidden = true;
    showFaults(problem, panel(), one("#range-faults"));
  }
  for (const button of all("button", panel())) button.disabled = !answer;
}

/** Where the range is asked for. */
export const address = (question) => `/v1/sweep?${query(ranged(question))}`;

/** Saves the columns as a file. */
export async function save(question) {
  const { answer } = await ask("columns", address(question), { headers: { accept: "text/csv" } });
  if (!answer) return;
  const link = el("a", { href: URL.createObjectURL(answer), download: "range.csv" });
  link.click();
  setTimeout(() => URL.revokeObjectURL(link.href), 1000);
}
