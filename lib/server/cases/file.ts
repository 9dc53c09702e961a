import "server-only";
import { Capture } from "@/entities/capture";
import type { Case } from "@/entities/case";
import { FaultTag } from "@/entities/fault-tag";
import { Note } from "@/entities/note";
import { ProfileVersion } from "@/entities/profile-version";
import { Roster } from "@/entities/roster";
import type { Tag } from "@/entities/tag";
import { Team } from "@/entities/team";
import { User } from "@/entities/user";
import {
  CASE_FORMAT,
  type CaptureFile,
  type CaseFile,
  type FaultTagFile,
  type NoteFile,
  type Settings,
  type TagFile,
} from "@/lib/case/case";
import { upgradeSettings } from "@/lib/case/upgrade";
import type { EntityManager } from "@/lib/server/database";

/** Shown for somebody whose account is gone. */
const departed = "a former member";

type Loaded<Row> = Row & { readonly summary?: unknown };

/** Names by id, one query for all people a case mentions. */
async function names(em: EntityManager, ids: readonly (string | undefined)[]): Promise<(id: string | undefined) => string> {
  const wanted = [...new Set(ids.filter((id) => id !== undefined))];
  const people = wanted.length > 0 ? await em.find(User, { id: { $in: wanted } }) : [];
  const byId = new Map(people.map((person) => [person.id, person.name]));
  return (id) => (id === undefined ? departed : (byId.get(id) ?? departed));
}

/** Settings out of their column; stored settings this program cannot read are our fault, not the viewer's. */
export function settingsOf(row: Pick<Case, "settings" | "number">): Settings {
  const read = upgradeSettings(row.settings);
  if (!read.ok) throw new Error(`case ${row.number}: ${read.problem.message}`);
  return read.value;
}

export function captureFile(row: Loaded<Capture>, uploadedBy: string): CaptureFile {
  return {
    id: row.id,
    ordinal: row.ordinal,
    name: row.name,
    size: row.size,
    sha256: row.sha256,
    uploaded_by: uploadedBy,
    created_at: row.createdAt.toISOString(),
    read: row.read,
    log: row.log ?? null,
    timebase: row.timebase ?? null,
    archive_size: row.archiveSize ?? null,
    summary: (row.summary as CaptureFile["summary"]) ?? null,
  };
}

export function noteFile(row: Note, author: string): NoteFile {
  return {
    id: row.id,
    number: row.number,
    capture: row.capture?.id ?? null,
    anchor: row.anchor,
    text: row.text,
    author,
    created_at: row.createdAt.toISOString(),
    edited_at: row.editedAt.toISOString(),
    version: row.version,
  };
}

export function tagFile(row: Tag, author: string): TagFile {
  return {
    id: row.id,
    capture: row.capture.id,
    fault_tag: row.faultTag.id,
    anchor: row.anchor,
    remark: row.remark,
    author,
    created_at: row.createdAt.toISOString(),
  };
}

export function faultTagFile(row: FaultTag): FaultTagFile {
  return { id: row.id, name: row.name, key: row.key ?? null, description: row.description, retired: row.retired };
}

/** Everything below a case in one piece; the caller has found the case through the filter. */
export async function caseFile(em: EntityManager, row: Case): Promise<CaseFile> {
  const settings = settingsOf(row);
  const captures = await em.find(Capture, { case: row.id }, { orderBy: { ordinal: "asc" } });
  const notes = await em.find(Note, { case: row.id }, { orderBy: { number: "asc" } });
  const tags = await tagsOf(em, row.id);
  const used = [...new Set(tags.map((tag) => tag.fault_tag))];
  const faultTags = used.length > 0 ? await em.find(FaultTag, { id: { $in: used } }) : [];
  const team = await em.findOneOrFail(Team, { id: row.team.id });
  const nameOf = await names(em, [
    row.assignee?.id,
    ...captures.map((capture) => capture.uploadedBy?.id),
    ...notes.map((note) => note.author?.id),
  ]);
  return {
    format: CASE_FORMAT,
    team: team.name,
    number: row.number,
    title: row.title,
    status: row.status,
    assignee: row.assignee ? nameOf(row.assignee.id) : null,
    finding: row.finding,
    settings,
    captures: captures.map((capture) => captureFile(capture, nameOf(capture.uploadedBy?.id))),
    notes: notes.map((note) => noteFile(note, nameOf(note.author?.id))),
    tags,
    fault_tags: faultTags.map(faultTagFile),
    roster: await rosterOf(em, row.team.id, settings),
    profile: await profileOf(em, row.team.id, settings),
    created_at: row.createdAt.toISOString(),
    updated_at: row.updatedAt.toISOString(),
  };
}

/** Plain rows: there can be thousands, and nobody edits them here. */
async function tagsOf(em: EntityManager, caseId: string): Promise<TagFile[]> {
  const rows: (Omit<TagFile, "created_at"> & { created_at: Date | string })[] = await em.execute(
    `select t.id, t.capture_id as capture, t.fault_tag_id as fault_tag, t.anchor, t.remark,
       coalesce(u.name, ?) as author, t.created_at
     from tags t join captures k on k.id = t.capture_id left join users u on u.id = t.author_id
     where k.case_id = ? order by t.created_at, t.id`,
    [departed, caseId],
  );
  return rows.map((row) => ({ ...row, created_at: new Date(row.created_at).toISOString() }));
}

async function rosterOf(em: EntityManager, team: string, settings: Settings): Promise<CaseFile["roster"]> {
  if (settings.roster === null) return [];
  // A roster that was deleted since leaves the case without one.
  return (await em.findOne(Roster, { id: settings.roster, team }))?.entries ?? [];
}

async function profileOf(em: EntityManager, team: string, { limits }: Settings): Promise<CaseFile["profile"]> {
  if (limits.kind !== "team") return null;
  const row = await em.findOne(ProfileVersion, { profile: { id: limits.profile, team }, version: limits.version });
  return row ? { name: row.name, version: row.version, base: row.base, changes: row.changes } : null;
}
