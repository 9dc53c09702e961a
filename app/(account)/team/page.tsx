import type { Metadata } from "next";
import Link from "next/link";
import { Invitations } from "@/components/account/Invitations";
import { Members } from "@/components/account/Members";
import { NameForm } from "@/components/account/NameForm";
import { pageMember } from "@/lib/server/access/page";
import { may } from "@/lib/server/access/viewer";
import { fork } from "@/lib/server/database";
import { renameTeam } from "@/lib/server/team/actions";
import { listInvitations } from "@/lib/server/team/invitations";
import { listMembers } from "@/lib/server/team/members";

export const metadata: Metadata = { title: "Team" };

export default async function TeamPage() {
  const viewer = await pageMember("/team", "team.read");
  const em = await fork();
  const members = await listMembers(em, viewer);
  const rows = members.map((member) => ({ ...member, self: member.userId === viewer.user.id }));
  return (
    <div className="grid gap-12">
      <h1 className="font-serif text-head">{viewer.team.name}</h1>
      <Members rows={rows} mayChange={may(viewer, "team.role")} mayRemove={may(viewer, "team.remove")} />
      {may(viewer, "team.invite") && <Invitations rows={await listInvitations(em, viewer)} />}
      {may(viewer, "team.edit") && (
        <div className="max-w-md">
          <NameForm action={renameTeam} label="Team's name" name={viewer.team.name} submit="Save the name" />
        </div>
      )}
      {may(viewer, "audit.read") && (
        <p className="font-sans text-label">
          <Link href="/team/audit">Audit trail of the team</Link>
        </p>
      )}
    </div>
  );
}
