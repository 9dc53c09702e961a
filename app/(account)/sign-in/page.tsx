import type { Metadata } from "next";
import Link from "next/link";
import { redirect } from "next/navigation";
import { Sheet } from "@/components/account/Sheet";
import { SignInForm } from "@/components/account/SignInForm";
import { pageViewer } from "@/lib/server/access/page";
import { nextPath } from "@/lib/server/auth/shapes";

export const metadata: Metadata = { title: "Sign in" };

export default async function SignInPage({ searchParams }: { searchParams: Promise<{ next?: string; email?: string }> }) {
  const asked = await searchParams;
  const next = nextPath.parse(asked.next);
  if ((await pageViewer()).kind !== "guest") redirect(next ?? "/cases");
  const ways = (
    <>
      <Link href="/forgot">Forgot the password?</Link> No account yet: <Link href="/sign-up">found a team</Link>, or ask a team
      lead for an invitation.
    </>
  );
  return (
    <Sheet title="Sign in" ways={ways}>
      <SignInForm next={next} email={typeof asked.email === "string" ? asked.email : undefined} />
    </Sheet>
  );
}
