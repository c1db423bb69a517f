// The bearer token, where the service asks for one. It stays in this tab.

import { one } from "./dom.js";

const KEY = "token";
let asking = null; // One dialog for all questions that wait for it.

export const hasToken = () => sessionStorage.getItem(KEY) !== null;

/** `fetch` with the token of this tab. Asks for one, and again while it is not the right one. */
export async function send(path, options = {}) {
  for (;;) {
    const token = sessionStorage.getItem(KEY);
    const headers = token === null ? options.headers : { ...options.headers, authorization: `Bearer ${token}` };
    const reply = await fetch(path, { ...options, headers });
    if (reply.status !== 401) return reply;
    // Another question may have brought a new token while this one was under way.
    if (token !== sessionStorage.getItem(KEY)) continue;
    asking ??= enter(token === null).finally(() => { asking = null; });
    if (!(await asking)) return reply;
  }
}

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
