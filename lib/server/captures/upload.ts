import "server-only";
import { randomUUID } from "node:crypto";
import type { z } from "zod";
import { Case } from "@/entities/case";
import { Upload } from "@/entities/upload";
import { User } from "@/entities/user";
import {
  partSize,
  type SignedParts,
  type SignPartsSchema,
  type StartUploadSchema,
  UPLOAD_LIMIT,
  type Upload as UploadView,
} from "@/lib/case/upload";
import type { MemberViewer } from "@/lib/server/access/viewer";
import { demand, findCase, visibleCases } from "@/lib/server/access/visible";
import type { EntityManager } from "@/lib/server/database";
import { Refusal } from "@/lib/server/http/problem";
import { type StoredPart, store } from "./store";

/** One's own upload; nobody else's, whatever the role. */
export async function findUpload(em: EntityManager, viewer: MemberViewer, id: string): Promise<Upload> {
  demand(viewer, "capture.upload");
  const row = await em.findOne(
    Upload,
    { $and: [{ id, owner: viewer.user.id }, { case: visibleCases(viewer) }] },
    { populate: ["case"], refresh: true },
  );
  if (!row) throw new Refusal("not-found", { detail: `upload ${id}` });
  return row;
}

/** Begins an upload in parts into a case of the team. */
export async function startUpload(
  em: EntityManager,
  viewer: MemberViewer,
  input: z.output<typeof StartUploadSchema>,
): Promise<UploadView> {
  demand(viewer, "capture.upload");
  const inCase = await findCase(em, viewer, input.case);
  if (input.size > UPLOAD_LIMIT.size) {
    throw new Refusal("too-large", {
      words: `The file is larger than ${UPLOAD_LIMIT.size / 2 ** 30} GiB. Compress it with gzip, or cut the recording.`,
    });
  }
  const open = await em.count(Upload, { owner: viewer.user.id, state: { $in: ["open", "checking"] } });
  if (open >= UPLOAD_LIMIT.open) {
    throw new Refusal("conflict", { words: `You have ${open} unfinished uploads. Finish or cancel one of them first.` });
  }
  const id = randomUUID();
  const key = `teams/${viewer.team.id}/captures/${id}/original`;
  const part = partSize(input.size);
  const row = em.create(Upload, {
    id,
    case: em.getReference(Case, inCase.id, { wrapped: true }),
    owner: em.getReference(User, viewer.user.id, { wrapped: true }),
    name: input.name,
    size: input.size,
    partSize: part,
    parts: Math.ceil(input.size / part),
    key,
    storageId: await store().begin(key),
    checksums: {},
  });
  await em.flush();
  return view(row, inCase.number, []);
}

/** Where an upload stands: which parts storage holds whole, so that only the others are sent again. */
export async function readUpload(em: EntityManager, viewer: MemberViewer, id: string): Promise<UploadView> {
  const row = await findUpload(em, viewer, id);
  const parts = row.state === "open" ? ((await store().parts(row.key, row.storageId)) ?? []) : [];
  return view(row, row.case.getEntity().number, parts);
}

/** One's own unfinished uploads, newest first. */
export async function listUploads(em: EntityManager, viewer: MemberViewer): Promise<readonly UploadView[]> {
  const rows = await em.find(
    Upload,
    { $and: [{ owner: viewer.user.id, state: { $in: ["open", "checking"] } }, { case: visibleCases(viewer) }] },
    { populate: ["case"], orderBy: { createdAt: "desc" } },
  );
  const views: UploadView[] = [];
  for (const row of rows) {
    const parts = row.state === "open" ? ((await store().parts(row.key, row.storageId)) ?? []) : [];
    views.push(view(row, row.case.getEntity().number, parts));
  }
  return views;
}

/** Bytes that part `number` must have. */
export function lengthOf(row: Pick<Upload, "size" | "partSize" | "parts">, number: number): number {
  return number < row.parts ? row.partSize : row.size - (row.parts - 1) * row.partSize;
}

/** Addresses for some parts; the checksum announced for each is what storage must hold in the end. */
export async function signParts(
  em: EntityManager,
  viewer: MemberViewer,
  id: string,
  input: z.output<typeof SignPartsSchema>,
): Promise<SignedParts> {
  const row = await findUpload(em, viewer, id);
  mustBeOpen(row);
  const beyond = input.parts.find((part) => part.number > row.parts);
  if (beyond)
    throw new Refusal("input-invalid", { words: `Part ${beyond.number} lies beyond the end: the file has ${row.parts}.` });
  const checksums = Object.fromEntries(input.parts.map((part) => [String(part.number), part.sha256]));
  // Merged in the database: two requests for different parts may be under way at once.
  await em.execute("update uploads set checksums = checksums || ?::jsonb, touched_at = now() where id = ?", [
    JSON.stringify(checksums),
    row.id,
  ]);
  const expires = new Date(Date.now() + UPLOAD_LIMIT.signed * 1000);
  const parts = await Promise.all(
    input.parts.map(async ({ number }) => {
      const size = lengthOf(row, number);
      return { number, size, url: await store().signPart(row.key, row.storageId, number, size) };
    }),
  );
  return { parts, expires_at: expires.toISOString() };
}

/** Gives an upload up. What is finished cannot be cancelled; cancelling twice is fine. */
export async function cancelUpload(em: EntityManager, viewer: MemberViewer, id: string): Promise<void> {
  const row = await findUpload(em, viewer, id);
  if (row.state === "cancelled" || row.state === "refused") return;
  const changed = await em.nativeUpdate(Upload, { id: row.id, state: "open" }, { state: "cancelled" });
  if (changed === 0) throw new Refusal("conflict", { words: "This upload is already being checked or is finished." });
  await store().abort(row.key, row.storageId);
}

export function mustBeOpen(row: Upload): void {
  if (row.state === "checking") throw new Refusal("upload-busy");
  if (row.state !== "open") throw new Refusal("upload-ended", { detail: row.state });
}

function view(row: Upload, number: number, stored: readonly StoredPart[]): UploadView {
  const received = stored.flatMap((part) => {
    const sha256 = row.checksums[String(part.number)];
    const whole = part.number >= 1 && part.number <= row.parts && part.size === lengthOf(row, part.number);
    return whole && sha256 ? [{ ...part, sha256 }] : [];
  });
  return {
    id: row.id,
    case: number,
    name: row.name,
    size: row.size,
    part_size: row.partSize,
    parts: row.parts,
    state: row.state,
    received,
    capture: row.capture?.id ?? null,
    created_at: row.createdAt.toISOString(),
    expires_at: new Date(row.touchedAt.getTime() + UPLOAD_LIMIT.stale * 3_600_000).toISOString(),
  };
}
