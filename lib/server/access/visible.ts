import "server-only";
import type { FilterQuery } from "@mikro-orm/core";
import { Capture } from "@/entities/capture";
import { Case } from "@/entities/case";
import type { Action } from "@/lib/case/roles";
import type { EntityManager } from "@/lib/server/database";
import { Refusal } from "@/lib/server/http/problem";
import { type MemberViewer, may, type Viewer } from "./viewer";

/**
 * The cases this viewer may see: the one filter every query for a case, or for anything below one, starts from. What it
 * leaves out does not exist for the viewer: "not yours" and "not there" are the same 404.
 */
export function visibleCases(viewer: Viewer): FilterQuery<Case> {
  switch (viewer.kind) {
    case "member":
      return { team: viewer.team.id };
    case "link":
      return { id: viewer.share.caseId, team: viewer.share.teamId };
    case "person":
    case "guest":
      return { id: { $in: [] } };
  }
}

/** The same for captures. */
export function visibleCaptures(viewer: Viewer): FilterQuery<Capture> {
  return { case: visibleCases(viewer) };
}

/** A case by its number in the viewer's team, or a refusal. */
export async function findCase(em: EntityManager, viewer: MemberViewer, number: number): Promise<Case> {
  const row = await em.findOne(Case, { $and: [visibleCases(viewer), { number }] });
  if (!row) throw new Refusal("not-found", { detail: `case ${number}` });
  return row;
}

/** A capture with its case, without its summary (which can be large), or a refusal. */
export async function findCapture(em: EntityManager, viewer: Viewer, id: string) {
  const row = await em.findOne(
    Capture,
    { $and: [visibleCaptures(viewer), { id }] },
    { populate: ["case"], exclude: ["summary"] },
  );
  if (!row) throw new Refusal("not-found", { detail: `capture ${id}` });
  return row;
}

/** Refuses what the role table does not allow; for the parts of a request that the door could not know. */
export function demand(viewer: Viewer, action: Action): void {
  if (!may(viewer, action)) throw new Refusal("forbidden", { detail: action });
}
