import "server-only";
import { LockMode } from "@mikro-orm/core";
import { Member } from "@/entities/member";
import { Session } from "@/entities/session";
import { Team } from "@/entities/team";
import { User } from "@/entities/user";
import type { Role } from "@/lib/case/roles";
import { type MemberViewer, type SignedIn, within } from "@/lib/server/access/viewer";
import { recordBy } from "@/lib/server/audit";
import { foundTeam } from "@/lib/server/auth/account";
import type { EntityManager } from "@/lib/server/database";
import { Refusal } from "@/lib/server/http/problem";

/** A member as the team page and the assignee choice show it. */
export interface TeamMember {
  /** Id of the membership. */
  readonly id: string;
  readonly userId: string;
  readonly name: string;
  readonly email: string;
  readonly role: Role;
  readonly joinedAt: Date;
}

/** Members of the viewer's team, oldest first. */
export async function listMembers(em: EntityManager, viewer: MemberViewer): Promise<TeamMember[]> {
  const rows = await em.find(Member, within(viewer), { populate: ["user"], orderBy: { joinedAt: "asc", id: "asc" } });
  return rows.map((row) => {
    const user = row.user.getEntity();
    return { id: row.id, userId: user.id, name: user.name, email: user.email, role: row.role, joinedAt: row.joinedAt };
  });
}

/** Teams the person belongs to, for switching. */
export async function listTeams(em: EntityManager, viewer: SignedIn): Promise<{ id: string; name: string; role: Role }[]> {
  const rows = await em.find(Member, { user: viewer.user.id }, { populate: ["team"], orderBy: { joinedAt: "asc", id: "asc" } });
  return rows.map((row) => ({ id: row.team.id, name: row.team.getEntity().name, role: row.role }));
}

/** Gives a member another role; a team's last lead keeps theirs. */
export async function changeRole(em: EntityManager, viewer: MemberViewer, memberId: string, role: Role): Promise<void> {
  await em.transactional(async (tx) => {
    const member = await lockedMember(tx, viewer, memberId);
    if (member.role === role) return;
    const before = member.role;
    if (before === "lead") await keepALead(tx, viewer, member);
    member.role = role;
    recordBy(tx, viewer, "member.role-changed", member.user.id, { from: before, to: role, name: member.user.getEntity().name });
  });
}

/** Takes a member out of the team; what they wrote stays. Open pages lose access with their next request. */
export async function removeMember(em: EntityManager, viewer: MemberViewer, memberId: string): Promise<void> {
  await em.transactional(async (tx) => {
    await remove(tx, viewer, await lockedMember(tx, viewer, memberId), "member.removed");
  });
}

/** The viewer's own way out of the team. */
export async function leaveTeam(em: EntityManager, viewer: MemberViewer): Promise<void> {
  await em.transactional(async (tx) => {
    await lockTeam(tx, viewer);
    const own = await tx.findOne(Member, { ...within(viewer), user: viewer.user.id }, { populate: ["user"] });
    if (!own) throw new Refusal("not-found");
    await remove(tx, viewer, own, "member.left");
  });
}

async function remove(em: EntityManager, viewer: MemberViewer, member: Member, event: string): Promise<void> {
  if (member.role === "lead") await keepALead(em, viewer, member);
  const { id, name } = member.user.getEntity();
  em.remove(member);
  await em.nativeUpdate(Session, { user: id, team: viewer.team.id }, { team: null });
  recordBy(em, viewer, event, id, { name, role: member.role });
}

/** Changes of a team's membership queue up at its row: two leads must not demote each other at once. */
async function lockTeam(em: EntityManager, viewer: MemberViewer): Promise<void> {
  await em.findOneOrFail(Team, { id: viewer.team.id }, { lockMode: LockMode.PESSIMISTIC_WRITE });
}

async function lockedMember(em: EntityManager, viewer: MemberViewer, id: string): Promise<Member> {
  await lockTeam(em, viewer);
  const member = await em.findOne(Member, { ...within(viewer), id }, { populate: ["user"] });
  if (!member) throw new Refusal("not-found", { detail: "member" });
  return member;
}

async function keepALead(em: EntityManager, viewer: MemberViewer, leaving: Member): Promise<void> {
  const others = await em.count(Member, { ...within(viewer), role: "lead", id: { $ne: leaving.id } });
  if (others === 0) throw new Refusal("last-lead");
}

export async function renameTeam(em: EntityManager, viewer: MemberViewer, name: string): Promise<void> {
  await em.transactional(async (tx) => {
    await tx.nativeUpdate(Team, { id: viewer.team.id }, { name });
    recordBy(tx, viewer, "team.renamed", viewer.team.id, { from: viewer.team.name, to: name });
  });
}

/** Makes another of the person's teams the one being worked in, on this browser only. */
export async function switchTeam(em: EntityManager, viewer: SignedIn, teamId: string): Promise<void> {
  const member = await em.findOne(Member, { user: viewer.user.id, team: teamId });
  if (!member) throw new Refusal("not-found", { detail: "team" });
  await workIn(em, viewer, teamId);
}

/** Founds a further team led by the viewer and works in it. */
export async function addTeam(em: EntityManager, viewer: SignedIn, name: string): Promise<string> {
  const team = await em.transactional(async (tx) => {
    return foundTeam(tx, await tx.findOneOrFail(User, { id: viewer.user.id }), name);
  });
  await workIn(em, viewer, team.id);
  return team.id;
}

/** Points the viewer's session at a team whose membership was just checked. */
export async function workIn(em: EntityManager, viewer: SignedIn, teamId: string): Promise<void> {
  if (viewer.sessionId !== null) await em.nativeUpdate(Session, { id: viewer.sessionId }, { team: teamId });
}
