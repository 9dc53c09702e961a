import type { Metadata } from "next";
import Link from "next/link";
import { Masthead } from "@/components/account/Masthead";
import { When } from "@/components/cases/When";
import { Derive } from "@/components/profiles/Derive";
import { LimitRows } from "@/components/profiles/LimitRows";
import { Cell, Table } from "@/components/ui/Table";
import type { ProfileView } from "@/lib/case/catalogue";
import { builtIn, highSpeedTable, isProfileName, PROFILE_NAMES, type ProfileName } from "@/lib/limits/profile";
import { pageMember } from "@/lib/server/access/page";
import { may, nameplate } from "@/lib/server/access/viewer";
import { fork } from "@/lib/server/database";
import { listProfiles } from "@/lib/server/profiles/read";

export const metadata: Metadata = { title: "Limits profiles" };

export default async function ProfilesPage({ searchParams }: { searchParams: Promise<{ mode?: string | string[] }> }) {
  const viewer = await pageMember("/profiles", "case.read");
  const asked = (await searchParams).mode;
  const mode: ProfileName = typeof asked === "string" && isProfileName(asked) ? asked : "Fast-mode";
  const profiles = await listProfiles(await fork(), viewer);
  return (
    <>
      <Masthead person={nameplate(viewer)} context="limits profiles" />
      <main className="mx-auto max-w-[90rem] px-4 py-8 sm:px-10">
        <h1 className="font-serif text-head">Limits profiles</h1>
        <p className="mt-2 max-w-[68ch] font-serif text-body">
          A profile is the set of limits a capture is judged by: a mode of the specification as published, or a copy of one with
          values of your own. A verdict is kept with the profile and the version it was given by.
        </p>
        <section className="mt-8">
          <h2 className="border-b border-ink font-serif text-lg italic">The team's own</h2>
          <Own profiles={profiles} />
        </section>
        {may(viewer, "profile.edit") && <Derive key={mode} base={mode} />}
        <section className="mt-10">
          <h2 className="border-b border-ink font-serif text-lg italic">Built in</h2>
          <BuiltIn mode={mode} />
        </section>
      </main>
    </>
  );
}

const columns = [
  { key: "name", head: "Profile" },
  { key: "base", head: "Derived from" },
  { key: "changes", head: "Values changed", number: true },
  { key: "version", head: "Version", number: true },
  { key: "changed", head: "Changed" },
];

function Own({ profiles }: { profiles: readonly ProfileView[] }) {
  if (profiles.length === 0) return <p className="mt-2 font-serif text-body text-quiet">None yet.</p>;
  return (
    <Table caption="Limits profiles of the team" columns={columns}>
      {profiles.map((profile) => (
        <tr key={profile.id} className="hover:bg-ink/5">
          <Cell className="min-w-52 font-serif text-body">
            <Link href={`/profiles/${profile.id}`} className="no-underline hover:underline">
              {profile.name}
            </Link>
          </Cell>
          <Cell>{profile.base}</Cell>
          <Cell number>{Object.keys(profile.changes).length}</Cell>
          <Cell number>{profile.version}</Cell>
          <Cell className="whitespace-nowrap text-quiet">
            <When at={profile.updated_at} />
          </Cell>
        </tr>
      ))}
    </Table>
  );
}

function BuiltIn({ mode }: { mode: ProfileName }) {
  const profile = builtIn(mode);
  return (
    <>
      <nav aria-label="Built-in profiles" className="my-3 flex flex-wrap gap-x-5 gap-y-1 font-sans text-label">
        {PROFILE_NAMES.map((name) => (
          <Link
            key={name}
            href={`/profiles?mode=${encodeURIComponent(name)}`}
            scroll={false}
            aria-current={name === mode ? "page" : undefined}
            className="no-underline aria-[current]:border-b aria-[current]:border-ink"
          >
            {name}
          </Link>
        ))}
      </nav>
      <LimitRows caption={mode === "High-speed" ? "Outside a High-speed transfer" : mode} limits={profile.limits} />
      {mode === "High-speed" && (
        <div className="mt-8 grid gap-8">
          <LimitRows caption="From the controller code to STOP, 100 pF" limits={highSpeedTable(100)} />
          <LimitRows
            caption="From the controller code to STOP, 400 pF; between the two, in proportion"
            limits={highSpeedTable(400)}
          />
        </div>
      )}
    </>
  );
}
