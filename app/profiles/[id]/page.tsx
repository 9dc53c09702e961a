import type { Metadata } from "next";
import Link from "next/link";
import { notFound } from "next/navigation";
import { Masthead } from "@/components/account/Masthead";
import { ProfileEditor } from "@/components/profiles/ProfileEditor";
import { pageMember } from "@/lib/server/access/page";
import { may, nameplate } from "@/lib/server/access/viewer";
import { fork } from "@/lib/server/database";
import { orNotFound } from "@/lib/server/http/page";
import { findProfile, profileView } from "@/lib/server/profiles/read";

export const metadata: Metadata = { title: "Limits profile" };

const UUID = /^[0-9a-f]{8}(-[0-9a-f]{4}){3}-[0-9a-f]{12}$/i;

export default async function ProfilePage({ params }: { params: Promise<{ id: string }> }) {
  const { id } = await params;
  if (!UUID.test(id)) notFound();
  const viewer = await pageMember(`/profiles/${id}`, "case.read");
  const profile = profileView(await orNotFound(findProfile(await fork(), viewer, id)));
  return (
    <>
      <Masthead person={nameplate(viewer)} context={`limits profile ${profile.name}`} />
      <main className="mx-auto max-w-[90rem] px-4 py-8 sm:px-10">
        <p className="mb-3 font-sans text-label">
          <Link href="/profiles">All limits profiles</Link>
        </p>
        <ProfileEditor initial={profile} mayEdit={may(viewer, "profile.edit")} />
      </main>
    </>
  );
}
