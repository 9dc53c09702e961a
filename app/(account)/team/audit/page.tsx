import type { Metadata } from "next";
import { Trail } from "@/components/account/Trail";
import { pageMember } from "@/lib/server/access/page";
import { readAudit } from "@/lib/server/audit";
import { fork } from "@/lib/server/database";

export const metadata: Metadata = { title: "Audit trail" };

const shown = 500;

export default async function AuditPage() {
  const viewer = await pageMember("/team/audit", "audit.read");
  return (
    <div className="grid gap-8">
      <h1 className="font-serif text-head">What was done in {viewer.team.name}</h1>
      <Trail rows={await readAudit(await fork(), viewer, shown)} shown={shown} />
    </div>
  );
}
