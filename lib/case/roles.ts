// In: a role. Out: what it may do. The one table of roles and actions; the server decides by it and the page only
// hides what it forbids. A guest is whoever holds a share link.

/** Roles a member of a team can have, from most to least. */
export const roles = ["lead", "engineer", "technician", "support"] as const;
export type Role = (typeof roles)[number];

/** Everything that is ever asked of the table. */
export const actions = [
  "case.read",
  "case.create",
  "case.edit",
  "case.status",
  "case.assign",
  "case.delete",
  "note.add",
  "tag.add",
  "verdict.give",
  "finding.write",
  "brief.print",
  "share.create",
  "share.revoke",
  "capture.upload",
  "capture.download",
  "profile.edit",
  "roster.edit",
  "catalogue.edit",
  "station.edit",
  "team.read",
  "team.edit",
  "team.invite",
  "team.remove",
  "team.role",
  "audit.read",
] as const;
export type Action = (typeof actions)[number];

const support = ["case.read", "note.add", "brief.print", "team.read"] as const satisfies readonly Action[];

const technician = [
  ...support,
  "case.create",
  "case.status",
  "tag.add",
  "verdict.give",
  "capture.upload",
  "capture.download",
] as const satisfies readonly Action[];

const engineer = [
  ...technician,
  "case.edit",
  "case.assign",
  "finding.write",
  "share.create",
  "share.revoke",
  "profile.edit",
  "roster.edit",
  "catalogue.edit",
] as const satisfies readonly Action[];

const lead = [
  ...engineer,
  "case.delete",
  "station.edit",
  "team.edit",
  "team.invite",
  "team.remove",
  "team.role",
  "audit.read",
] as const satisfies readonly Action[];

/** The table itself. A guest sees the one case of the link and may print it; the link decides about the raw file. */
export const permissions = {
  lead,
  engineer,
  technician,
  support,
  guest: ["case.read", "brief.print"],
} as const satisfies Record<Role | "guest", readonly Action[]>;

/** Whether the table allows `action` to `role`. */
export function allows(role: Role | "guest", action: Action): boolean {
  const list: readonly Action[] = permissions[role];
  return list.includes(action);
}

/** What each role is for, in the words shown beside the choice. */
export const roleWords: Record<Role, string> = {
  lead: "runs the team: members, stations, audit trail, and all casework",
  engineer: "all casework: settings, findings, sharing, profiles and rosters",
  technician: "uploads captures, tags transactions, gives verdicts",
  support: "reads cases, asks questions, prints briefs",
};
