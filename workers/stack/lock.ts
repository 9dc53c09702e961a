// In: the data folder. Out: the promise that one start at a time works in it.

import { link, readFile, rename, rm, writeFile } from "node:fs/promises";
import path from "node:path";
import { Complaint, systemCode } from "./complaint";
import { birth, endLeftover } from "./process";

interface Holder {
  readonly pid: number;
  readonly born: string;
  address?: string;
  /** Children that must not outlive the holder, should it die without a chance to end them. */
  children: { readonly name: string; readonly pid: number; readonly born: string }[];
}

export interface Lock {
  /** True when an earlier start died without tidying up and its lock was taken over. */
  readonly takenOver: boolean;
  note(change: { address?: string; child?: { name: string; pid: number } }): Promise<void>;
  release(): Promise<void>;
}

/** Takes the folder's lock, or complains with the address of the start that holds it. */
export async function takeLock(home: string): Promise<Lock> {
  const file = path.join(home, "lock.json");
  const mine: Holder = { pid: process.pid, born: (await birth(process.pid)) ?? "unknown", children: [] };
  const takenOver = !(await create(file, mine)) && (await takeOver(file, mine));
  return {
    takenOver,
    async note({ address, child }) {
      if (address) mine.address = address;
      if (child) mine.children.push({ ...child, born: (await birth(child.pid)) ?? "unknown" });
      await writeFile(`${file}.new`, JSON.stringify(mine));
      await rename(`${file}.new`, file);
    },
    async release() {
      const holder = await read(file);
      if (holder?.pid === process.pid) await rm(file, { force: true });
    },
  };
}

async function create(file: string, holder: Holder): Promise<boolean> {
  // Written whole under another name and then linked, so that nobody ever reads half a lock.
  const draft = `${file}.${process.pid}`;
  await writeFile(draft, JSON.stringify(holder));
  try {
    await link(draft, file);
    return true;
  } catch (error) {
    if (systemCode(error) === "EEXIST") return false;
    throw error;
  } finally {
    await rm(draft, { force: true });
  }
}

async function takeOver(file: string, mine: Holder): Promise<true> {
  const holder = await read(file);
  if (holder && (await birth(holder.pid)) === holder.born) {
    throw new Complaint(
      `Firstlow is already running from this folder (process ${holder.pid})${holder.address ? ` at ${holder.address}` : ", still starting"}.`,
      "Use that one, or stop it with Ctrl-C in its terminal first.",
    );
  }
  console.log("An earlier start ended without tidying up; taking over its folder.");
  for (const child of holder?.children ?? []) {
    if (await endLeftover(child.pid, child.born)) console.log(`  ended its ${child.name} (process ${child.pid})`);
  }
  await rm(file, { force: true });
  if (!(await create(file, mine))) throw new Complaint("Another start took the folder at the same moment.", "Use that one.");
  return true;
}

async function read(file: string): Promise<Holder | undefined> {
  try {
    return JSON.parse(await readFile(file, "utf8"));
  } catch {
    // Gone meanwhile: nobody holds it.
    return undefined;
  }
}
