import "server-only";
import { type Action, allows, type Role } from "@/lib/case/roles";

/** Nobody we know. */
export interface GuestViewer {
  readonly kind: "guest";
}

export interface Person {
  readonly id: string;
  readonly name: string;
  readonly email: string;
}

/** Signed in, but in no team: newly removed from the last one. May found a team or accept an invitation. */
export interface PersonViewer {
  readonly kind: "person";
  readonly user: Person;
  /** Id of the session's row (already hashed); null where a command acts for the person. */
  readonly sessionId: string | null;
}

/** Signed in and working in one team, with the role held there. */
export interface MemberViewer {
  readonly kind: "member";
  readonly user: Person;
  readonly team: { readonly id: string; readonly name: string };
  readonly role: Role;
  readonly sessionId: string | null;
}

/** Holder of a share link: one case of one team, read-only. */
export interface LinkViewer {
  readonly kind: "link";
  readonly share: {
    readonly id: string;
    readonly caseId: string;
    readonly teamId: string;
    /** Whether whoever shared it lets the original file be downloaded. */
    readonly download: boolean;
  };
}

export type SignedIn = PersonViewer | MemberViewer;
export type Viewer = GuestViewer | SignedIn | LinkViewer;

export const guest: GuestViewer = { kind: "guest" };

/** Whether the role table lets this viewer do `action` at all. Which rows it may be done to is the filter's part. */
export function may(viewer: Viewer, action: Action): boolean {
  switch (viewer.kind) {
    case "member":
      return allows(viewer.role, action);
    case "link":
      return allows("guest", action) || (action === "capture.download" && viewer.share.download);
    case "person":
    case "guest":
      return false;
  }
}

/** The condition every query for a team's own rows starts from. */
export function within(viewer: MemberViewer): { readonly team: string } {
  return { team: viewer.team.id };
}

/** What a page's head says about the viewer; null for guests and links. */
export function nameplate(viewer: Viewer): { readonly name: string; readonly team: string | null } | null {
  if (viewer.kind === "guest" || viewer.kind === "link") return null;
  return { name: viewer.user.name, team: viewer.kind === "member" ? viewer.team.name : null };
}
