import type { Metadata } from "next";
import { Masthead } from "@/components/account/Masthead";
import { RosterList } from "@/components/rosters/RosterList";
import { pageMember } from "@/lib/server/access/page";
import { may, nameplate } from "@/lib/server/access/viewer";
import { fork } from "@/lib/server/database";
import { listRosters } from "@/lib/server/rosters/read";

export const metadata: Metadata = { title: "Rosters" };

export default async function RostersPage() {
  const viewer = await pageMember("/rosters", "case.read");
  const rosters = await listRosters(await fork(), viewer);
  return (
    <>
      <Masthead person={nameplate(viewer)} context="rosters" />
      <main className="mx-auto max-w-[90rem] px-4 py-8 sm:px-10">
        <h1 className="mb-6 font-serif text-head">Rosters</h1>
        <RosterList initial={rosters} mayEdit={may(viewer, "roster.edit")} />
      </main>
    </>
  );
}
