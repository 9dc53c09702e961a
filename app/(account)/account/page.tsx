import type { Metadata } from "next";
import { Devices } from "@/components/account/Devices";
import { NameForm } from "@/components/account/NameForm";
import { PasswordForm } from "@/components/account/PasswordForm";
import { Teams } from "@/components/account/Teams";
import { Notice } from "@/components/ui/Notice";
import { pagePerson } from "@/lib/server/access/page";
import { rename } from "@/lib/server/auth/actions";
import { listDevices } from "@/lib/server/auth/devices";
import { fork } from "@/lib/server/database";
import { listTeams } from "@/lib/server/team/members";

export const metadata: Metadata = { title: "Account" };

export default async function AccountPage() {
  const viewer = await pagePerson("/account");
  const em = await fork();
  const current = viewer.kind === "member" ? viewer.team.id : null;
  const teams = (await listTeams(em, viewer)).map((team) => ({ ...team, current: team.id === current }));
  return (
    <div className="grid max-w-3xl gap-12">
      <div>
        <h1 className="font-serif text-head">{viewer.user.name}</h1>
        <p className="font-sans text-label text-quiet">{viewer.user.email}</p>
      </div>
      {current === null && (
        <Notice kind="warning" title="You are in no team">
          Found one below, or accept an invitation that was mailed to you.
        </Notice>
      )}
      <Teams rows={teams} />
      <div className="max-w-md">
        <NameForm action={rename} label="Your name" name={viewer.user.name} submit="Save the name" />
      </div>
      <div className="max-w-md">
        <PasswordForm email={viewer.user.email} />
      </div>
      <Devices rows={await listDevices(em, viewer)} />
    </div>
  );
}
