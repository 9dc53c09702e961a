import "server-only";
import type { z } from "zod";
import { Capture } from "@/entities/capture";
import { FaultTag } from "@/entities/fault-tag";
import { Tag } from "@/entities/tag";
import type { Anchor, TagFile } from "@/lib/case/case";
import type { ChangeTagsSchema, TagsAnswer } from "@/lib/case/wire";
import { type MemberViewer, within } from "@/lib/server/access/viewer";
import { demand, findCase } from "@/lib/server/access/visible";
import { record } from "@/lib/server/cases/events";
import { tagFile } from "@/lib/server/cases/file";
import type { EntityManager } from "@/lib/server/database";
import { Refusal } from "@/lib/server/http/problem";

type Wish = z.output<typeof ChangeTagsSchema>["add"][number];

/** An anchor as one word, so that the database keeps the same fault tag off the same place twice. */
export function placeOf(anchor: Anchor): string {
  switch (anchor.kind) {
    case "transaction":
      return `t${anchor.transaction}`;
    case "range":
      return `r${anchor.from_tick}-${anchor.to_tick}`;
    case "whole":
      return "w";
  }
}

/** Adds and removes fault tags in one go: all of it happens, or nothing. */
export async function changeTags(
  em: EntityManager,
  viewer: MemberViewer,
  number: number,
  input: z.output<typeof ChangeTagsSchema>,
): Promise<TagsAnswer> {
  demand(viewer, "tag.add");
  return em.transactional(async (tx) => {
    const row = await findCase(tx, viewer, number);
    const words = await checkWishes(tx, viewer, row.id, input.add);
    const removed = await removeTags(tx, row.id, input.remove);
    await insertTags(tx, viewer, input.add);
    const added = await placed(tx, input.add);
    if (removed.length > 0) {
      await record(tx, row.id, viewer, {
        kind: "tag.removed",
        words: `took off ${count(removed.length)}`,
        before: { tags: removed },
      });
    }
    if (input.add.length > 0) {
      await record(tx, row.id, viewer, {
        kind: "tag.added",
        words: `tagged ${count(input.add.length)}: ${words}`,
        after: { tags: added },
      });
    }
    return { added, removed: removed.map((tag) => tag.id) };
  });
}

function count(tags: number): string {
  return tags === 1 ? "one place" : `${tags} places`;
}

/** Refuses captures of other cases and fault tags of other teams; answers the names of the fault tags used. */
async function checkWishes(em: EntityManager, viewer: MemberViewer, caseId: string, wishes: readonly Wish[]): Promise<string> {
  if (wishes.length === 0) return "";
  const captures = [...new Set(wishes.map((wish) => wish.capture))];
  if ((await em.count(Capture, { id: { $in: captures }, case: caseId })) !== captures.length) {
    throw new Refusal("input-invalid", { fields: { add: "names a capture that is not of this case" } });
  }
  const ids = [...new Set(wishes.map((wish) => wish.fault_tag))];
  const known = await em.find(FaultTag, { ...within(viewer), id: { $in: ids }, retired: false });
  if (known.length !== ids.length) {
    throw new Refusal("input-invalid", { fields: { add: "names a fault tag that is not in the catalogue" } });
  }
  return known.map((tag) => tag.name).join(", ");
}

async function removeTags(em: EntityManager, caseId: string, ids: readonly string[]) {
  if (ids.length === 0) return [];
  const rows = await em.find(Tag, { id: { $in: [...ids] }, capture: { case: caseId } }, { populate: ["author"] });
  const files = rows.map((row) => tagFile(row, nameOf(row)));
  await em.nativeDelete(Tag, { id: { $in: rows.map((row) => row.id) } });
  return files;
}

function nameOf(row: Tag): string {
  return row.author?.getEntity().name ?? "a former member";
}

/** Wishes as rows of a statement: one statement however many there are, and no object of the ORM for each. */
const WISHES = `jsonb_to_recordset(?::jsonb) as w(at int, capture uuid, fault_tag uuid, place text, anchor jsonb, remark text)`;

function rowsOf(wishes: readonly Wish[]): string {
  return JSON.stringify(wishes.map((wish, at) => ({ at, ...wish, place: placeOf(wish.anchor) })));
}

/** A tag that is there already stays as it is. */
async function insertTags(em: EntityManager, viewer: MemberViewer, wishes: readonly Wish[]): Promise<void> {
  if (wishes.length === 0) return;
  await em.execute(
    `insert into tags (id, capture_id, fault_tag_id, anchor, place, remark, author_id, created_at)
     select gen_random_uuid(), w.capture, w.fault_tag, w.anchor, w.place, w.remark, ?, now() from ${WISHES}
     on conflict do nothing`,
    [viewer.user.id, rowsOf(wishes)],
  );
}

/** The tags now standing on the places asked for, in the order asked. */
async function placed(em: EntityManager, wishes: readonly Wish[]): Promise<TagsAnswer["added"]> {
  if (wishes.length === 0) return [];
  const rows: (Omit<TagFile, "created_at"> & { created_at: Date | string })[] = await em.execute(
    `select t.id, t.capture_id as capture, t.fault_tag_id as fault_tag, t.anchor, t.remark,
       coalesce(u.name, 'a former member') as author, t.created_at
     from ${WISHES}
     join tags t on t.capture_id = w.capture and t.place = w.place and t.fault_tag_id = w.fault_tag
     left join users u on u.id = t.author_id
     order by w.at`,
    [rowsOf(wishes)],
  );
  return rows.map((row) => ({ ...row, created_at: new Date(row.created_at).toISOString() }));
}
