import "server-only";
import { headers } from "next/headers";
import { notFound, redirect } from "next/navigation";
import { cache } from "react";
import type { Action } from "@/lib/case/roles";
import { settleSession } from "./settle";
import { type GuestViewer, type MemberViewer, may, type SignedIn } from "./viewer";

/** The viewer of the page being rendered; asked for any number of times, settled once. */
export const pageViewer = cache(async (): Promise<SignedIn | GuestViewer> => {
  return settleSession((await headers()).get("cookie") ?? "");
});

/** For pages of signed-in people; others are sent to sign in and come back to `here`. */
export async function pagePerson(here: string): Promise<SignedIn> {
  const viewer = await pageViewer();
  if (viewer.kind === "guest") redirect(`/sign-in?next=${encodeURIComponent(here)}`);
  return viewer;
}

/** For pages of a team. What the role does not include does not exist for the viewer. */
export async function pageMember(here: string, action: Action): Promise<MemberViewer> {
  const viewer = await pagePerson(here);
  if (viewer.kind === "person") redirect("/account");
  if (!may(viewer, action)) notFound();
  return viewer;
}
