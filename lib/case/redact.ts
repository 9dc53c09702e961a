// In: a whole case. Out: what a share link may see of it. Whatever is not copied here stays inside the team.

import type { CaseFile } from "./case";

/** A case with the inside of the team taken out. */
export type RedactedCase = Omit<CaseFile, "assignee">;

export interface Redaction {
  readonly file: RedactedCase;
  /** What was taken out, in words for the person who shares. */
  readonly removed: readonly string[];
}

/**
 * Always removed: the assignee, people's names (authors become "team", since a link can travel further than it was sent),
 * roster registers (often unpublished), and fault tags of the catalogue that this case does not use.
 */
export function redact(file: CaseFile): Redaction {
  const removed: string[] = [];
  if (file.assignee !== null) removed.push("who the case is assigned to");
  if (file.notes.length + file.tags.length + file.captures.length > 0) removed.push("the names of authors");
  if (file.roster.some((entry) => entry.registers !== "")) removed.push("register descriptions of the roster");
  const used = new Set(file.tags.map((tag) => tag.fault_tag));
  return {
    removed,
    file: {
      format: file.format,
      team: file.team,
      number: file.number,
      title: file.title,
      status: file.status,
      finding: file.finding,
      settings: file.settings,
      captures: file.captures.map((capture) => ({ ...capture, uploaded_by: file.team })),
      notes: file.notes.map((note) => ({ ...note, author: file.team })),
      tags: file.tags.map((tag) => ({ ...tag, author: file.team })),
      fault_tags: file.fault_tags.filter((tag) => used.has(tag.id)),
      roster: file.roster.map((entry) => ({ ...entry, registers: "" })),
      profile: file.profile,
      created_at: file.created_at,
      updated_at: file.updated_at,
    },
  };
}
