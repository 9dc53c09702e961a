import "server-only";
import type { z } from "zod";
import type { Action } from "@/lib/case/roles";
import { settleSession } from "@/lib/server/access/settle";
import { type MemberViewer, may, type SignedIn, type Viewer } from "@/lib/server/access/viewer";
import type { EntityManager } from "@/lib/server/database";
import { type Rule, strike } from "@/lib/server/rate";
import type { Caller } from "./caller";
import { inputRefusal, Refusal } from "./problem";

/** Who a door is for: anyone; somebody signed in; a member whose role allows the door's action. */
export interface Admitted {
  anyone: Viewer;
  person: SignedIn;
  member: MemberViewer;
}

/** What every door says about itself. `action` is asked of the role table before anything is read. */
export interface Rules<Who extends keyof Admitted> {
  readonly who: Who;
  /** Required where `who` is "member"; where it is "anyone", links and members are asked, guests refused. */
  readonly action: Who extends "member" ? Action : Action | null;
  /** Which limit of the list counts a use, per caller; none for plain reads. */
  readonly rate?: Rule;
}

/** What every handler gets. */
export interface Given<Who extends keyof Admitted, Input> {
  readonly viewer: Admitted[Who];
  readonly input: Input;
  readonly caller: Caller;
  /** A unit of work of its own. */
  readonly em: EntityManager;
}

/**
 * Settles and checks the viewer. `settle` replaces the session where another proof counts (a share link, a station's key).
 */
export async function admit<Who extends keyof Admitted>(
  rules: Rules<Who>,
  caller: Caller,
  settle?: () => Promise<Viewer>,
): Promise<Admitted[Who]> {
  const viewer = settle ? await settle() : await settleSession(caller.cookie);
  if (rules.rate)
    await strike(rules.rate, viewer.kind === "member" || viewer.kind === "person" ? viewer.user.id : caller.address);
  if (!admissible(rules.who, viewer)) {
    throw viewer.kind === "guest"
      ? new Refusal("signed-out")
      : new Refusal("forbidden", { detail: `${viewer.kind} at a door for ${rules.who}` });
  }
  if (rules.action !== null && !may(viewer, rules.action)) {
    throw viewer.kind === "guest" ? new Refusal("signed-out") : new Refusal("forbidden", { detail: rules.action });
  }
  return viewer;
}

function admissible<Who extends keyof Admitted>(who: Who, viewer: Viewer): viewer is Viewer & Admitted[Who] {
  if (who === "anyone") return true;
  if (who === "person") return viewer.kind === "person" || viewer.kind === "member";
  return viewer.kind === "member";
}

/** Checked input, or a refusal naming each wrong field. */
export function parse<Schema extends z.ZodType>(schema: Schema, raw: unknown): z.output<Schema> {
  const checked = schema.safeParse(raw);
  if (!checked.success) throw inputRefusal(checked.error);
  return checked.data;
}
