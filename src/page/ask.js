// Questions to the service. A newer question of one kind takes the place of an older one.

import { send } from "./access.js";

const running = new Map();

/** What the service answers: `{answer}`, `{problem}`, or nothing when a newer question was asked. */
export async function ask(kind, path, options = {}) {
  running.get(kind)?.abort();
  const control = new AbortController();
  running.set(kind, control);
  try {
    const reply = await send(path, { ...options, signal: control.signal });
    const type = reply.headers.get("content-type") ?? "";
    if (!reply.ok) return { problem: await problem(reply, type) };
    return { answer: type.startsWith("application/json") ? await reply.json() : await reply.blob() };
  } catch (error) {
    if (control.signal.aborted) return {};
    return { problem: unreachable(error) };
  }
}

/** Forgets the running question of a kind. */
export function forget(kind) {
  running.get(kind)?.abort();
  running.delete(kind);
}

async function problem(reply, type) {
  if (type.startsWith("application/problem+json")) return reply.json();
  return { title: "No answer", detail: `the service answered with status ${reply.status}`, errors: [] };
}

function unreachable() {
  return { title: "No answer", detail: "the service cannot be reached; is it still running?", errors: [] };
}

/** Shows an SVG in an image element. */
export function picture(image, blob, alt) {
  const url = URL.createObjectURL(blob);
  const before = image.src;
  image.onload = () => { if (before.startsWith("blob:")) URL.revokeObjectURL(before); };
  image.src = url;
  image.alt = alt;
  image.hidden = false;
}
