import type { Metadata } from "next";
import Link from "next/link";
import { notFound } from "next/navigation";
import { Masthead } from "@/components/account/Masthead";
import { RosterEditor } from "@/components/rosters/RosterEditor";
import { pageMember } from "@/lib/server/access/page";
import { may, nameplate } from "@/lib/server/access/viewer";
import { fork } from "@/lib/server/database";
import { orNotFound } from "@/lib/server/http/page";
import { findRoster, rosterView } from "@/lib/server/rosters/read";

export const metadata: Metadata = { title: "Roster" };

const UUID = /^[0-9a-f]{8}(-[0-9a-f]{4}){3}-[0-9a-f]{12}$/i;

export default async function RosterPage({ params }: { params: Promise<{ id: string }> }) {
  const { id } = await params;
  if (!UUID.test(id)) notFound();
  const viewer = await pageMember(`/rosters/${id}`, "case.read");
  const roster = rosterView(await orNotFound(findRoster(await fork(), viewer, id)));
  return (
    <>
      <Masthead person={nameplate(viewer)} context={`roster ${roster.name}`} />
      <main className="mx-auto max-w-[90rem] px-4 py-8 sm:px-10">
        <p className="mb-3 font-sans text-label">
          <Link href="/rosters">All rosters</Link>
        </p>
        <RosterEditor initial={roster} mayEdit={may(viewer, "roster.edit")} />
      </main>
    </>
  );
}
