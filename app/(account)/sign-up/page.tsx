import type { Metadata } from "next";
import Link from "next/link";
import { redirect } from "next/navigation";
import { Sheet } from "@/components/account/Sheet";
import { SignUpForm } from "@/components/account/SignUpForm";
import { pageViewer } from "@/lib/server/access/page";

export const metadata: Metadata = { title: "Found a team" };

export default async function SignUpPage() {
  if ((await pageViewer()).kind !== "guest") redirect("/account");
  const ways = (
    <>
      Have an account? <Link href="/sign-in">Sign in</Link>. Only want to read a capture?{" "}
      <Link href="/">Drop it on the front page</Link>; nothing is uploaded.
    </>
  );
  return (
    <Sheet title="Found a team" lede="You become its lead and can save cases, invite others and send links." ways={ways}>
      <SignUpForm />
    </Sheet>
  );
}
