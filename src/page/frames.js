// The way by the names of two frames of the catalogue, when the service has one.

import { send } from "./access.js";
import { el, fresh, one } from "./dom.js";
import { choice, read } from "./fields.js";

let catalogue = { frames: [] };

/** Asks for the catalogue and offers its frames. */
export async function loadFrames() {
  const reply = await send("/v1/frames");
  if (!reply.ok) return;
  catalogue = await reply.json();
  if (catalogue.frames.length === 0) return;
  const options = catalogue.frames.map((frame) => [frame.name, frame.about ? `${frame.name}: ${frame.about}` : frame.name]);
  const id = fresh();
  const hint = catalogue.epoch ? `seconds from ${catalogue.epoch}` : "such as 2031-03-02T05:12:00Z";
  one("#by-names").append(
    catalogue.about ? el("p", { className: "hint" }, catalogue.about) : "",
    choice({ label: "measured in", path: "from", options }),
    choice({ label: "needed in", path: "to", options }),
    el("div", { className: "field" }, el("label", { className: "label", htmlFor: id }, "at the time"),
      el("input", { id, type: "text", autocomplete: "off", data: { path: "time" } }), el("span", { className: "hint" }, hint)),
    el("p", { className: "hint", id: "sensor-note", role: "status" }));
  one("#way-choice").hidden = false;
}

/** Whether the way is given by names. */
export const named = () => one("#way-form").value === "names";

/** Chooses between steps and names. */
export function chooseForm(form) {
  one("#way-form").value = form;
  one("#by-steps").hidden = form === "names";
  one("#by-names").hidden = form !== "names";
}

/** The names as they stand in a question. */
export function readNames() {
  const { time, ...names } = read(one("#by-names"));
  const from = catalogue.frames.find((frame) => frame.name === names.from);
  const parts = ["e", "b"].filter((field) => from?.sensor?.[field]);
  one("#sensor-note").textContent = parts.length
    ? `${from.name} is a sensor: ${parts.join(" and ")} above are its raw numbers, whatever the unit says, `
      + `and become ${parts.map((field) => catalogue.units[field]).join(" and ")}.`
    : "";
  return time === null ? names : { ...names, time };
}

/** Puts the names of a question into the fields. */
export function loadNames({ from, to, time }) {
  one('[data-path="from"]').value = from;
  one('[data-path="to"]').value = to;
  one('[data-path="time"]').value = time ?? "";
}
