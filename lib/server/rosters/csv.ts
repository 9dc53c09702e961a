import "server-only";
import type { z } from "zod";
import { ROSTER_LIMIT, type RosterView, SaveRosterSchema } from "@/lib/case/catalogue";
import { readRoster, writeRoster } from "@/lib/diagnosis/roster";
import type { MemberViewer } from "@/lib/server/access/viewer";
import type { EntityManager } from "@/lib/server/database";
import { inputRefusal, Refusal } from "@/lib/server/http/problem";
import { findRoster } from "./read";
import { addRoster } from "./write";

/** A roster out of CSV text; a line that cannot be used is named, and nothing is kept. */
export async function importRoster(em: EntityManager, viewer: MemberViewer, name: string, text: string): Promise<RosterView> {
  return addRoster(em, viewer, rosterInput(name, text));
}

/** Checked entries of a CSV. */
export function rosterInput(name: string, text: string): z.output<typeof SaveRosterSchema> {
  const read = readRoster(text);
  if (!read.ok) {
    const { message, advice } = read.problem;
    throw new Refusal("input-invalid", { words: `${message} ${advice}`, fields: { csv: message } });
  }
  if (read.value.length > ROSTER_LIMIT) {
    throw new Refusal("input-invalid", { fields: { csv: `holds ${read.value.length} devices; at most ${ROSTER_LIMIT} fit` } });
  }
  const checked = SaveRosterSchema.safeParse({ name, entries: read.value });
  if (!checked.success) throw inputRefusal(checked.error);
  return checked.data;
}

/** A roster as a CSV file to save. */
export async function exportRoster(em: EntityManager, viewer: MemberViewer, id: string): Promise<Response> {
  const row = await findRoster(em, viewer, id);
  const name = row.name.replace(/[^\w.-]+/g, "-");
  return new Response(writeRoster(row.entries), {
    headers: {
      "content-type": "text/csv; charset=utf-8",
      "content-disposition": `attachment; filename="${name}.csv"`,
      "x-content-type-options": "nosniff",
    },
  });
}
