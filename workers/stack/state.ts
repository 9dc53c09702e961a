// In: the project's ignored data folder. Out: what one start remembers for the next: ports and secrets of its own services.

import { randomBytes } from "node:crypto";
import { chmod, mkdir, readFile, rename, writeFile } from "node:fs/promises";
import path from "node:path";
import { Complaint, systemCode } from "./complaint";

export interface State {
  readonly storageSecret: string;
  port?: number;
  databasePort?: number;
  storagePort?: number;
  mailPort?: number;
  mailboxPort?: number;
}

/** Opens the data folder, making it on the first start. Secrets never leave it, so it is closed to other users. */
export async function readState(home: string): Promise<State> {
  await mkdir(home, { recursive: true });
  const file = path.join(home, "state.json");
  try {
    return JSON.parse(await readFile(file, "utf8"));
  } catch (error) {
    if (error instanceof SyntaxError) {
      throw new Complaint(
        `${file} is damaged (${error.message}).`,
        "It holds the ports and the key of the local services: restore it, or move the folder away to begin afresh.",
      );
    }
    if (systemCode(error) !== "ENOENT") throw error;
  }
  const fresh: State = { storageSecret: randomBytes(24).toString("base64url") };
  await writeState(home, fresh);
  return fresh;
}

/** Replaces the file in one step, so that a full disk or a power cut leaves the old one. */
export async function writeState(home: string, state: State): Promise<void> {
  const file = path.join(home, "state.json");
  await writeFile(`${file}.new`, `${JSON.stringify(state, null, 2)}\n`, { mode: 0o600 });
  await chmod(`${file}.new`, 0o600);
  await rename(`${file}.new`, file);
}
