import type { Metadata } from "next";
import { notFound } from "next/navigation";
import { Masthead } from "@/components/account/Masthead";
import { Casework } from "@/components/casework/Casework";
import { pageMember } from "@/lib/server/access/page";
import { nameplate } from "@/lib/server/access/viewer";
import { readCase } from "@/lib/server/cases/read";
import { fork } from "@/lib/server/database";
import { orNotFound } from "@/lib/server/http/page";

export const metadata: Metadata = { title: "Case" };

export default async function CasePage({ params }: { params: Promise<{ number: string }> }) {
  const number = Number((await params).number);
  if (!Number.isSafeInteger(number) || number < 1) notFound();
  const viewer = await pageMember(`/cases/${number}`, "case.read");
  const view = await orNotFound(readCase(await fork(), viewer, number));
  return (
    <>
      <Masthead person={nameplate(viewer)} context={`case ${view.number}`} />
      <main>
        <Casework initial={view} me={viewer.user.name} />
      </main>
    </>
  );
}
