import type { Metadata } from "next";
import Link from "next/link";
import { ResetForm } from "@/components/account/ResetForm";
import { Sheet } from "@/components/account/Sheet";
import { resetOpen } from "@/lib/server/auth/reset";
import { fork } from "@/lib/server/database";

export const metadata: Metadata = { title: "New password", robots: { index: false } };

export default async function ResetPage({ params }: { params: Promise<{ token: string }> }) {
  const { token } = await params;
  if (!(await resetOpen(await fork(), token))) {
    return (
      <Sheet
        title="This link no longer works"
        lede="It was used already, or it is more than an hour old, or a newer one was asked for."
        ways={<Link href="/forgot">Ask for a new link</Link>}
      />
    );
  }
  return (
    <Sheet title="Choose a new password" lede="Setting it signs out every browser that is signed in now.">
      <ResetForm token={token} />
    </Sheet>
  );
}
