// Where the answer to a file is kept until it is saved: in the browser's private files on disk
// (WHATWG File System), or in its memory where a browser has none.

const FOLDER = "restated";
/** Bytes joined into one part in memory: a browser keeps a few large parts better than many small ones. */
const PART = 16 * 1024 * 1024;

/** A place for one answer: `write` takes its bytes, `whole` gives them as a Blob, `drop` forgets them. */
export async function place() {
  try {
    return await onDisk();
  } catch {
    return inMemory();
  }
}

/** Says what to do when an answer does not fit, in place of what the browser says. */
async function orFull(work, why) {
  try {
    return await work;
  } catch (error) {
    throw { detail: `The browser has no room for so long an answer (${error.name}): ${why}, or send the file with curl and its -T option.` };
  }
}

async function onDisk() {
  const folder = await (await navigator.storage.getDirectory()).getDirectoryHandle(FOLDER, { create: true });
  await sweepUp(folder);
  const name = crypto.randomUUID();
  const release = await hold(name);
  const handle = await folder.getFileHandle(name, { create: true });
  const file = await handle.createWritable();
  const full = "free some disk space";
  return {
    write: (bytes) => orFull(file.write(bytes), full),
    async whole() {
      await orFull(file.close(), full);
      return handle.getFile();
    },
    async drop() {
      await file.abort().catch(() => {}); // It may be closed already.
      await folder.removeEntry(name);
      release();
    },
  };
}

/** Takes a lock that this tab keeps until it lets go or is closed; gives the letting go. */
function hold(name) {
  return new Promise((held, failed) => {
    navigator.locks.request(name, () => new Promise((release) => { held(release); })).catch(failed);
  });
}

/** Removes what tabs left behind that are closed by now. */
async function sweepUp(folder) {
  for await (const name of folder.keys()) {
    await navigator.locks.request(name, { ifAvailable: true }, (lock) => lock && folder.removeEntry(name).catch(() => {}));
  }
}

function inMemory() {
  const parts = [];
  let [pending, size] = [[], 0];
  const join = async () => {
    const part = new Blob(pending);
    [pending, size] = [[], 0];
    // A Blob that found no room says so only when it is read.
    await orFull(part.slice(0, 1).arrayBuffer(), "it keeps answers on disk only when the page comes over TLS or from this machine; open it so");
    parts.push(part);
  };
  return {
    async write(bytes) {
      pending.push(bytes);
      size += bytes.length;
      if (size >= PART) await join();
    },
    async whole() {
      await join();
      return new Blob(parts);
    },
    async drop() {
      parts.length = 0;
    },
  };
}
