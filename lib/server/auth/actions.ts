"use server";

import { after } from "next/server";
import { z } from "zod";
import { fork } from "@/lib/server/database";
import { action } from "@/lib/server/http/action";
import { Refusal } from "@/lib/server/http/problem";
import { post } from "@/lib/server/mail/post";
import { strike } from "@/lib/server/rate";
import { changePassword as change, signIn as findPerson, signUp as found, rename as renamePerson } from "./account";
import { endDevices } from "./devices";
import { askReset, useReset } from "./reset";
import { endSession, startSession } from "./session";
import * as shapes from "./shapes";

const home = "/cases";

export const signUp = action({
  who: "anyone",
  action: null,
  rate: "sign-up",
  input: z.object({ team: shapes.teamName, name: shapes.personName, email: shapes.email, password: shapes.newPassword }),
  handle: async ({ em, input, caller }) => {
    const { user, team } = await found(em, input);
    return { to: home, cookie: await startSession(user.id, team.id, caller) };
  },
});

export const signIn = action({
  who: "anyone",
  action: null,
  input: z.object({ email: shapes.email, password: shapes.anyPassword, next: shapes.nextPath }),
  handle: async ({ em, input, caller }) => {
    const user = await findPerson(em, input.email, input.password, caller);
    return { to: input.next ?? home, cookie: await startSession(user.id, null, caller) };
  },
});

export const signOut = action({
  who: "anyone",
  action: null,
  input: z.object({ next: shapes.nextPath }),
  handle: async ({ input, caller }) => ({ to: input.next ?? "/", cookie: await endSession(caller) }),
});

export const forgot = action({
  who: "anyone",
  action: null,
  input: z.object({ email: shapes.email }),
  handle: async ({ input, caller }) => {
    await strike("reset-mail-address", caller.address);
    await strike("reset-mail", input.email);
    // Found and mailed after the answer, which is then the same, and as fast, whether or not there is an account.
    after(async () => {
      const letter = await askReset(await fork(), input.email);
      if (letter) await post(letter).catch((error: unknown) => console.error("reset mail", error));
    });
    return { message: `If ${input.email} has an account, a mail with a link is on its way. The link works for an hour.` };
  },
});

export const reset = action({
  who: "anyone",
  action: null,
  input: z.object({ token: shapes.token, password: shapes.newPassword }),
  handle: async ({ em, input, caller }) => {
    await strike("reset-use", caller.address);
    const user = await useReset(em, input.token, input.password);
    return { to: home, cookie: await startSession(user.id, null, caller) };
  },
});

export const rename = action({
  who: "person",
  action: null,
  rate: "write",
  input: z.object({ name: shapes.personName }),
  handle: async ({ em, input, viewer }) => {
    await renamePerson(em, viewer, input.name);
    return { message: "Name saved." };
  },
});

export const changePassword = action({
  who: "person",
  action: null,
  input: z.object({ currentPassword: shapes.anyPassword, newPassword: shapes.newPassword }),
  handle: async ({ em, input, viewer }) => {
    await change(em, viewer, input.currentPassword, input.newPassword);
    return { message: "Password changed. Every other browser was signed out." };
  },
});

export const endDevice = action({
  who: "person",
  action: null,
  rate: "write",
  input: z.object({ id: z.string().regex(/^[0-9a-f]{64}$/) }),
  handle: async ({ em, input, viewer }) => {
    if ((await endDevices(em, viewer, input.id)) === 0)
      throw new Refusal("not-found", { words: "That browser was signed out already." });
    return { message: "That browser was signed out." };
  },
});

export const endOtherDevices = action({
  who: "person",
  action: null,
  rate: "write",
  input: z.object({}),
  handle: async ({ em, viewer }) => {
    const ended = await endDevices(em, viewer);
    return { message: ended === 1 ? "1 other browser was signed out." : `${ended} other browsers were signed out.` };
  },
});
