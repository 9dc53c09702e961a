import "server-only";
import { isDeepStrictEqual } from "node:util";
import { LockMode } from "@mikro-orm/core";
import type { z } from "zod";
import { Capture } from "@/entities/capture";
import { Case } from "@/entities/case";
import { Event } from "@/entities/event";
import { Team } from "@/entities/team";
import { Upload } from "@/entities/upload";
import { User } from "@/entities/user";
import { defaultSettings, type Settings, type Status, statusWords } from "@/lib/case/case";
import type { Action } from "@/lib/case/roles";
import { type CaseField, type CaseView, type CreateCaseSchema, caseFields, type EditCaseSchema } from "@/lib/case/wire";
import type { MemberViewer } from "@/lib/server/access/viewer";
import { demand, findCase, visibleCases } from "@/lib/server/access/visible";
import { recordBy } from "@/lib/server/audit";
import { rejudge } from "@/lib/server/captures/analysis";
import { store } from "@/lib/server/captures/store";
import { type EntityManager, fork } from "@/lib/server/database";
import { Refusal } from "@/lib/server/http/problem";
import { checkSettings } from "./choice";
import { record } from "./events";
import { settingsOf } from "./file";
import { caseView, colleague, readCase } from "./read";

/** Opens a new case under the team's next number. */
export async function createCase(
  em: EntityManager,
  viewer: MemberViewer,
  input: z.output<typeof CreateCaseSchema>,
): Promise<CaseView> {
  demand(viewer, "case.create");
  const settings = input.settings ?? defaultSettings;
  await checkSettings(em, viewer, settings);
  return em.transactional(async (tx) => {
    const row = tx.create(Case, {
      team: tx.getReference(Team, viewer.team.id, { wrapped: true }),
      number: await nextNumber(tx, viewer.team.id),
      title: input.title,
      settings,
      createdBy: tx.getReference(User, viewer.user.id, { wrapped: true }),
    });
    await tx.flush();
    await record(tx, row.id, viewer, { kind: "case.created", words: `opened the case “${row.title}”` });
    return caseView(tx, viewer, row);
  });
}

/** The row stays locked until the transaction ends, so no number is given twice and none is left out but by a rollback. */
async function nextNumber(em: EntityManager, team: string): Promise<number> {
  const [row]: { last_case: number }[] = await em.execute(
    `insert into counters as c (team_id, last_case) values (?, 1)
     on conflict (team_id) do update set last_case = c.last_case + 1 returning last_case`,
    [team],
  );
  return row.last_case;
}

const needed: Record<CaseField, Action> = {
  title: "case.edit",
  status: "case.status",
  assignee: "case.assign",
  finding: "finding.write",
  settings: "case.edit",
};

/**
 * Changes the fields given. Edits of one field made on the same version do not overwrite each other: the second is refused
 * as "stale" with the case as it now stands, and its own text is still with the sender. Different fields do not collide.
 */
export async function editCase(
  em: EntityManager,
  viewer: MemberViewer,
  number: number,
  edit: z.output<typeof EditCaseSchema>,
): Promise<CaseView> {
  const given = caseFields.filter((field) => edit[field] !== undefined);
  for (const field of given) demand(viewer, needed[field]);
  if (edit.settings) await checkSettings(em, viewer, edit.settings);
  if (edit.assignee && !(await colleague(em, viewer, edit.assignee))) {
    throw new Refusal("input-invalid", { fields: { assignee: "is not a member of this team" } });
  }
  const edited = await em.transactional(async (tx) => {
    const row = await tx.findOne(
      Case,
      { $and: [visibleCases(viewer), { number }] },
      { lockMode: LockMode.PESSIMISTIC_WRITE, refresh: true },
    );
    if (!row) throw new Refusal("not-found", { detail: `case ${number}` });
    const now = valuesOf(row);
    const changed = given.filter((field) => !isDeepStrictEqual(now[field], edit[field]));
    await refuseCollision(tx, viewer, row, edit.version, changed);
    if (changed.length > 0) await apply(tx, viewer, row, edit, changed, now);
    return { row, changed };
  });
  // After the edit is kept: reading the archives anew can take seconds, and no row is locked meanwhile.
  if (edited.changed.includes("settings")) await rejudge(await fork(), viewer, edited.row.id);
  return readCase(await fork(), viewer, number);
}

interface Values {
  readonly title: string;
  readonly status: Case["status"];
  readonly assignee: string | null;
  readonly finding: string;
  readonly settings: Settings;
}

function valuesOf(row: Case): Values {
  return {
    title: row.title,
    status: row.status,
    assignee: row.assignee?.id ?? null,
    finding: row.finding,
    settings: settingsOf(row),
  };
}

async function refuseCollision(
  em: EntityManager,
  viewer: MemberViewer,
  row: Case,
  readAt: number,
  changed: readonly CaseField[],
): Promise<void> {
  if (row.version === readAt) return;
  const since = await em.find(Event, { case: row.id, kind: "case.edited", caseVersion: { $gt: readAt } });
  const touched = new Set(since.flatMap((event) => Object.keys(event.after ?? {})));
  const collided = changed.filter((field) => touched.has(field));
  if (collided.length === 0) return;
  throw new Refusal("stale", {
    detail: collided.join(", "),
    words: `Somebody else changed the ${collided.join(" and the ")} in the meantime. Both versions are kept; compare them and save again.`,
    theirs: await caseView(em, viewer, row),
  });
}

async function apply(
  em: EntityManager,
  viewer: MemberViewer,
  row: Case,
  edit: z.output<typeof EditCaseSchema>,
  changed: readonly CaseField[],
  before: Values,
): Promise<void> {
  if (edit.title !== undefined) row.title = edit.title;
  if (edit.status !== undefined) row.status = edit.status;
  if (edit.finding !== undefined) row.finding = edit.finding;
  if (edit.settings !== undefined) row.settings = edit.settings;
  if (edit.assignee !== undefined) {
    row.assignee = edit.assignee === null ? null : em.getReference(User, edit.assignee, { wrapped: true });
  }
  await em.flush();
  await record(em, row.id, viewer, {
    kind: "case.edited",
    words: editWords(changed, row),
    before: pick(before, changed),
    after: pick(valuesOf(row), changed),
    caseVersion: row.version,
  });
}

function pick(values: Values, fields: readonly CaseField[]): Record<string, unknown> {
  return Object.fromEntries(fields.map((field) => [field, values[field]]));
}

function editWords(changed: readonly CaseField[], row: Case): string {
  const words: Record<CaseField, string> = {
    title: `renamed the case to “${row.title}”`,
    status: `set the status to ${statusWords[row.status as Status]}`,
    assignee: row.assignee ? "assigned the case" : "took the assignment back",
    finding: "changed the finding",
    settings: "changed the settings",
  };
  return changed.map((field) => words[field]).join(", ");
}

/** Removes a case, everything below it, and its files. */
export async function deleteCase(em: EntityManager, viewer: MemberViewer, number: number): Promise<void> {
  demand(viewer, "case.delete");
  const row = await findCase(em, viewer, number);
  const captures = await em.find(Capture, { case: row.id }, { exclude: ["summary"] });
  const open = await em.find(Upload, { case: row.id, state: { $in: ["open", "checking"] } });
  // The case's own trail goes with it; the team's trail keeps that it was there.
  await em.transactional(async (tx) => {
    await tx.nativeDelete(Case, { id: row.id });
    recordBy(tx, viewer, "case.deleted", row.id, { number: row.number, title: row.title });
    await tx.flush();
  });
  // Rows first: a file without a row is swept later, a row without its file would be a broken case.
  for (const upload of open) await store().abort(upload.key, upload.storageId);
  for (const capture of captures) await store().remove([capture.key, ...(capture.archiveKey ? [capture.archiveKey] : [])]);
}
