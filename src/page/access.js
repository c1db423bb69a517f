// Requests as the service asks for them: with its bearer token, which stays in this tab, and when it has time.

import { one } from "./dom.js";

const KEY = "token";
/** How often a service that has too much to do is asked again. */
const TRIES = 10;

let asking = null; // One dialog for all questions that wait for it.

export const hasToken = () => sessionStorage.getItem(KEY) !== null;

/**
 * `fetch` with the token of this tab. Asks for one, and again while it is not the right one; sends the request
 * again, as long after as it says, to a service that has too much to do (RFC 9110, 10.2.3).
 */
export async function send(path, options = {}) {
  for (let tries = 1; ;) {
    const token = sessionStorage.getItem(KEY);
    const headers = token === null ? options.headers : { ...options.headers, authorization: `Bearer ${token}` };
    const reply = await fetch(path, { ...options, headers });
    const wait = reply.headers.get("retry-after");
    if ([429, 503].includes(reply.status) && /^\d+$/.test(wait) && tries < TRIES) {
      tries += 1;
      await pause(Number(wait), options.signal);
      continue;
    }
    if (reply.status !== 401) return reply;
    // Another question may have brought a new token while this one was under way.
    if (token !== sessionStorage.getItem(KEY)) continue;
    asking ??= enter(token === null).finally(() => { asking = null; });
    if (!(await asking)) return reply;
  }
}

/** Some seconds, or until there is no need. */
const pause = (seconds, signal) => new Promise((over, stopped) => {
  setTimeout(over, seconds * 1000);
  signal?.addEventListener("abort", () => stopped(signal.reason), { once: true });
});

/** Asks the user; whether there is a token to try. */
function enter(first) {
  const dialog = one("#token-dialog");
  one("#token-note").textContent = first ? "" : "That one is not known to the service.";
  one("#token").value = "";
  return new Promise((done) => {
    dialog.onclose = () => {
      const token = one("#token").value.trim();
      if (dialog.returnValue === "use") sessionStorage.setItem(KEY, token);
      done(dialog.returnValue === "use");
    };
    dialog.returnValue = "";
    dialog.showModal();
  });
}
