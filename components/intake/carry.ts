// A file opened at the front door, carried in this browser across signing in to the intake page. It leaves the browser only
// when it is opened as a case there.

import type { ReadChoices } from "@/lib/engine/samples/reader";

const DATABASE = "firstlow-carry";
const STORE = "file";
const KEY = "carried";
/** Milliseconds after which a file that was never fetched is forgotten. */
const KEPT_MS = 60 * 60 * 1000;

function opened(): Promise<IDBDatabase> {
  return new Promise((done, fail) => {
    const asked = indexedDB.open(DATABASE, 1);
    asked.onupgradeneeded = () => asked.result.createObjectStore(STORE);
    asked.onsuccess = () => done(asked.result);
    asked.onerror = () => fail(asked.error);
  });
}

async function within<T>(mode: IDBTransactionMode, act: (store: IDBObjectStore) => IDBRequest<T>): Promise<T> {
  const database = await opened();
  try {
    return await new Promise((done, fail) => {
      const asked = act(database.transaction(STORE, mode).objectStore(STORE));
      asked.onsuccess = () => done(asked.result);
      asked.onerror = () => fail(asked.error);
    });
  } finally {
    database.close();
  }
}

/** What was laid aside: the file, and what the person answered about it. */
export interface Carried {
  readonly file: File;
  readonly read: ReadChoices;
}

/** Lays a file aside for the intake page. */
export async function carry(blob: Blob, name: string, read: ReadChoices): Promise<void> {
  await within("readwrite", (store) => store.put({ blob, name, read, at: Date.now() }, KEY));
}

/** The file laid aside, once; null where there is none. */
export async function fetchCarried(): Promise<Carried | null> {
  const found: { blob: Blob; name: string; read: ReadChoices; at: number } | undefined = await within("readonly", (store) =>
    store.get(KEY),
  );
  if (!found) return null;
  await within("readwrite", (store) => store.delete(KEY));
  return Date.now() - found.at > KEPT_MS ? null : { file: new File([found.blob], found.name), read: found.read };
}
