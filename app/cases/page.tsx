import type { Metadata } from "next";
import Link from "next/link";
import { Masthead } from "@/components/account/Masthead";
import { CaseList } from "@/components/cases/CaseList";
import { buttonClass } from "@/components/ui/Button";
import { CaseQuerySchema } from "@/lib/case/wire";
import { pageMember } from "@/lib/server/access/page";
import { may, nameplate } from "@/lib/server/access/viewer";
import { listCases } from "@/lib/server/cases/list";
import { fork } from "@/lib/server/database";

export const metadata: Metadata = { title: "Cases" };

export default async function CasesPage({
  searchParams,
}: {
  searchParams: Promise<Record<string, string | string[] | undefined>>;
}) {
  const viewer = await pageMember("/cases", "case.read");
  // A damaged query shows the plain list rather than an error.
  const query = CaseQuerySchema.safeParse(await searchParams);
  const initial = await listCases(await fork(), viewer, query.success ? query.data : CaseQuerySchema.parse({}));
  const mayCreate = may(viewer, "case.create");
  return (
    <>
      <Masthead person={nameplate(viewer)} context="cases" />
      <main className="mx-auto max-w-[90rem] px-4 py-8 sm:px-10">
        <div className="mb-6 flex flex-wrap items-baseline justify-between gap-4">
          <h1 className="font-serif text-head">Cases</h1>
          {mayCreate && (
            <Link href="/cases/new" className={buttonClass("solid")}>
              Open a capture
            </Link>
          )}
        </div>
        <CaseList initial={initial} mayCreate={mayCreate} />
      </main>
    </>
  );
}
