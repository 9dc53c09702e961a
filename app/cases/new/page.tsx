import type { Metadata } from "next";
import { Masthead } from "@/components/account/Masthead";
import { Intake } from "@/components/intake/Intake";
import { pageMember } from "@/lib/server/access/page";
import { nameplate } from "@/lib/server/access/viewer";

export const metadata: Metadata = { title: "Open a capture" };

export default async function NewCasePage() {
  const viewer = await pageMember("/cases/new", "case.create");
  return (
    <>
      <Masthead person={nameplate(viewer)} context="a new case" />
      <main className="mx-auto max-w-[90rem] px-4 py-8 sm:px-10">
        <h1 className="mb-6 font-serif text-head">Open a capture</h1>
        <Intake />
      </main>
    </>
  );
}
