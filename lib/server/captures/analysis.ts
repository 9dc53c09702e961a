import "server-only";
import { randomUUID } from "node:crypto";
import type { z } from "zod";
import { Capture } from "@/entities/capture";
import { Case } from "@/entities/case";
import { ok } from "@/lib/base/result";
import type { Timebase } from "@/lib/base/time";
import { analysisSettings } from "@/lib/case/analysis";
import type { CaptureFile, Read } from "@/lib/case/case";
import {
  type AnalyseSchema,
  type SignedArchive,
  type StartArchiveSchema,
  type StoreAnalysisSchema,
  UPLOAD_LIMIT,
} from "@/lib/case/upload";
import type { Summary } from "@/lib/diagnosis/report";
import { openArchive } from "@/lib/engine/archive/reader";
import { openCapture } from "@/lib/engine/samples/open";
import type { MemberViewer } from "@/lib/server/access/viewer";
import { demand, findCapture, visibleCases } from "@/lib/server/access/visible";
import { record } from "@/lib/server/cases/events";
import { captureFile, caseFile } from "@/lib/server/cases/file";
import type { EntityManager } from "@/lib/server/database";
import { Refusal } from "@/lib/server/http/problem";
import { archiving } from "./archive";
import { check } from "./check";
import { host } from "./host";
import { type Reading, read } from "./reading";
import { storedSource } from "./source";
import { store } from "./store";

/** Storage keys of one capture lie in one folder, beside the original. */
function folderOf(key: string): string {
  return key.slice(0, key.lastIndexOf("/"));
}

/** An address to put the edge archive to. What is put there is checked before anybody is served it. */
export async function startArchive(
  em: EntityManager,
  viewer: MemberViewer,
  id: string,
  input: z.output<typeof StartArchiveSchema>,
): Promise<SignedArchive> {
  demand(viewer, "capture.upload");
  const row = await findCapture(em, viewer, id);
  if (input.size > UPLOAD_LIMIT.archive) {
    throw new Refusal("too-large", { words: "The archive of this capture is too large to be stored. Cut the recording." });
  }
  const key = `${folderOf(row.key)}/incoming-${randomUUID()}`;
  const expires = new Date(Date.now() + UPLOAD_LIMIT.signed * 1000);
  return { key, url: await store().signPut(key, input.size), expires_at: expires.toISOString() };
}

/** Checks an archive, reads it under the case's settings, and keeps it and what was read in place of any earlier ones. */
export async function storeAnalysis(
  em: EntityManager,
  viewer: MemberViewer,
  id: string,
  input: z.output<typeof StoreAnalysisSchema>,
): Promise<CaptureFile> {
  demand(viewer, "capture.upload");
  const row = await findCapture(em, viewer, id);
  const incoming = input.archive.key;
  const folder = `${folderOf(row.key)}/`;
  if (!incoming.startsWith(folder) || !/^incoming-[0-9a-f-]{36}$/.test(incoming.slice(folder.length))) {
    throw new Refusal("input-invalid", { fields: { "archive.key": "is not an address given for this capture" } });
  }
  // The signed address still works for a while, so what is checked and kept is a copy that nobody can write to.
  const kept = `${folder}archive-${randomUUID()}`;
  if (!(await store().copy(incoming, kept))) {
    throw new Refusal("upload-mismatch", { words: "The archive has not arrived in storage. Send it again." });
  }
  return replacing(row, kept, async () => {
    const reading = await readArchive(em, viewer, row, kept, input);
    const capture = await keep(em, viewer, row.id, { key: kept, size: input.archive.size, ...input, ...reading });
    await store().remove([incoming]);
    return capture;
  });
}

/** Reads the original here on the server: for a browser that left before it sent its archive, for stations, for the demo. */
export async function analyseOriginal(
  em: EntityManager,
  viewer: MemberViewer,
  id: string,
  { read: choices, log }: z.output<typeof AnalyseSchema>,
): Promise<CaptureFile> {
  demand(viewer, "capture.upload");
  const row = await findCapture(em, viewer, id);
  const settings = await settingsOf(em, viewer, row, choices, log);
  const opened = await openCapture(storedSource(row.key, row.name, row.size), host, choices);
  const archive = opened.ok ? archiving(opened.value) : null;
  const reading = await read(archive ? ok(archive.capture) : opened, settings);
  const bytes = archive ? await archive.finish() : new Uint8Array(0);
  const kept = `${folderOf(row.key)}/archive-${randomUUID()}`;
  return replacing(row, kept, async () => {
    await store().put(kept, bytes);
    return keep(em, viewer, row.id, { key: kept, size: bytes.byteLength, read: choices, log, ...reading });
  });
}

/** Judges the captures of a case anew after its settings changed, from their archives. */
export async function rejudge(em: EntityManager, viewer: MemberViewer, caseId: string): Promise<void> {
  const rows = await em.find(Capture, { case: caseId, archiveKey: { $ne: null } }, { exclude: ["summary"], populate: ["case"] });
  for (const row of rows) {
    const { archiveKey: key, archiveSize: size } = row;
    if (!key || !size) continue;
    const log = row.log ?? null;
    const settings = await settingsOf(em, viewer, row, row.read, log);
    const reading = await read(await openArchive(storedSource(key, row.name, size), host), settings);
    await keep(em, viewer, row.id, { key, size, read: row.read, log, ...reading });
  }
}

type Found = Awaited<ReturnType<typeof findCapture>>;

/** Puts a new archive in the place of the old one; where that fails the new one goes and the old one stays. */
async function replacing<T>(row: Found, kept: string, work: () => Promise<T>): Promise<T> {
  const earlier = row.archiveKey;
  let done: T;
  try {
    done = await work();
  } catch (error) {
    await store().remove([kept]);
    throw error;
  }
  if (earlier) await store().remove([earlier]);
  return done;
}

async function settingsOf(em: EntityManager, viewer: MemberViewer, row: Found, choices: Read, log: string | null) {
  const inCase = await em.findOneOrFail(Case, { $and: [visibleCases(viewer), { id: row.case.id }] });
  return analysisSettings(await caseFile(em, inCase), { read: choices, log });
}

async function readArchive(
  em: EntityManager,
  viewer: MemberViewer,
  row: Found,
  key: string,
  { archive, read: choices, log }: z.output<typeof StoreAnalysisSchema>,
): Promise<Reading> {
  const found = await check(await store().open(key), UPLOAD_LIMIT.archive);
  if (found.size !== archive.size || found.sha256 !== archive.sha256) {
    throw new Refusal("upload-mismatch", { words: "The archive in storage is not the one that was announced. Send it again." });
  }
  const settings = await settingsOf(em, viewer, row, choices, log);
  return read(await openArchive(storedSource(key, row.name, found.size), host), settings);
}

interface Kept {
  readonly key: string;
  readonly size: number;
  readonly read: Read;
  readonly log: string | null;
  readonly summary: Summary;
  readonly timebase: Timebase;
}

async function keep(
  em: EntityManager,
  viewer: MemberViewer,
  id: string,
  { key, size, summary, read: choices, log, timebase }: Kept,
): Promise<CaptureFile> {
  return em.transactional(async (tx) => {
    const row = await tx.findOneOrFail(Capture, { id }, { populate: ["uploadedBy"], refresh: true });
    row.archiveKey = key;
    row.archiveSize = size;
    row.summary = summary;
    row.read = choices;
    row.log = log;
    row.timebase = { ...timebase };
    row.verdict = summary.verdict;
    row.transactions = summary.transactionCount;
    row.faults = faultCount(summary);
    row.contests = summary.contests.length;
    await tx.flush();
    await record(tx, row.case.id, viewer, {
      kind: "capture.analysed",
      words: `read ${row.name}: ${summary.transactionCount} transactions, verdict ${summary.verdict}`,
      after: { read: choices, limits: summary.limits },
    });
    return captureFile(row, row.uploadedBy?.getEntity().name ?? "a former member");
  });
}

/** The list of faults may be cut; the totals are not. */
function faultCount(summary: Summary): number {
  const totals = Object.values(summary.fault_totals ?? {});
  return totals.length > 0 ? totals.reduce((sum, count) => sum + count, 0) : summary.faults.length;
}
