"use server";

import { z } from "zod";
import { roles } from "@/lib/case/roles";
import { startSession } from "@/lib/server/auth/session";
import * as shapes from "@/lib/server/auth/shapes";
import { action } from "@/lib/server/http/action";
import { strike } from "@/lib/server/rate";
import { joinAs, joinAsNew, invite as mailInvitation, revokeInvitation as revoke } from "./invitations";
import * as members from "./members";

const role = z.enum(roles, { error: "Choose one of the roles." });
const id = z.uuid();

export const invite = action({
  who: "member",
  action: "team.invite",
  rate: "invitation",
  input: z.object({ email: shapes.email, role }),
  handle: async ({ em, input, viewer }) => {
    await mailInvitation(em, viewer, input.email, input.role);
    return { message: `An invitation is on its way to ${input.email}.` };
  },
});

export const revokeInvitation = action({
  who: "member",
  action: "team.invite",
  rate: "write",
  input: z.object({ id }),
  handle: async ({ em, input, viewer }) => {
    await revoke(em, viewer, input.id);
    return { message: "The invitation was withdrawn; its link no longer works." };
  },
});

export const changeRole = action({
  who: "member",
  action: "team.role",
  rate: "write",
  input: z.object({ id, role }),
  handle: async ({ em, input, viewer }) => {
    await members.changeRole(em, viewer, input.id, input.role);
    return { message: "Role saved." };
  },
});

export const removeMember = action({
  who: "member",
  action: "team.remove",
  rate: "write",
  input: z.object({ id }),
  handle: async ({ em, input, viewer }) => {
    await members.removeMember(em, viewer, input.id);
    return { message: "Removed from the team." };
  },
});

export const leaveTeam = action({
  who: "member",
  action: "team.read",
  rate: "write",
  input: z.object({}),
  handle: async ({ em, viewer }) => {
    await members.leaveTeam(em, viewer);
    return { to: "/account" };
  },
});

export const renameTeam = action({
  who: "member",
  action: "team.edit",
  rate: "write",
  input: z.object({ name: shapes.teamName }),
  handle: async ({ em, input, viewer }) => {
    await members.renameTeam(em, viewer, input.name);
    return { message: "Name saved." };
  },
});

export const switchTeam = action({
  who: "person",
  action: null,
  rate: "write",
  input: z.object({ id }),
  handle: async ({ em, input, viewer }) => {
    await members.switchTeam(em, viewer, input.id);
    return { to: "/cases" };
  },
});

export const addTeam = action({
  who: "person",
  action: null,
  rate: "write",
  input: z.object({ name: shapes.teamName }),
  handle: async ({ em, input, viewer }) => {
    await members.addTeam(em, viewer, input.name);
    return { to: "/cases" };
  },
});

export const joinNew = action({
  who: "anyone",
  action: null,
  input: z.object({ token: shapes.token, name: shapes.personName, password: shapes.newPassword }),
  handle: async ({ em, input, caller }) => {
    await strike("invitation-use", caller.address);
    const joined = await joinAsNew(em, input.token, input.name, input.password);
    return { to: "/cases", cookie: await startSession(joined.user, joined.team, caller) };
  },
});

export const join = action({
  who: "person",
  action: null,
  input: z.object({ token: shapes.token }),
  handle: async ({ em, input, viewer, caller }) => {
    await strike("invitation-use", caller.address);
    await members.workIn(em, viewer, await joinAs(em, input.token, viewer));
    return { to: "/cases" };
  },
});
