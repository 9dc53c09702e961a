import Link from "next/link";
import { type Role, roleWords } from "@/lib/case/roles";
import { JoinForm, JoinNewForm } from "./JoinForm";
import { Sheet } from "./Sheet";
import { SignOut } from "./SignOut";

export interface InvitationProps {
  token: string;
  offer: {
    readonly team: string;
    readonly email: string;
    readonly role: Role;
    readonly from: string | null;
    readonly account: boolean;
  };
  signedInAs: string | null;
}

export function Invitation({ token, offer, signedInAs }: InvitationProps) {
  const lede = `${offer.from ?? "A team lead"} invites ${offer.email} as ${offer.role}: ${roleWords[offer.role]}.`;
  return (
    <Sheet title={`Join ${offer.team}`} lede={lede}>
      <Way token={token} offer={offer} signedInAs={signedInAs} />
    </Sheet>
  );
}

function Way({ token, offer, signedInAs }: InvitationProps) {
  const here = `/invitation/${token}`;
  if (signedInAs === offer.email) return <JoinForm token={token} />;
  if (signedInAs !== null) {
    return (
      <div className="grid gap-3 font-serif text-body">
        <p>You are signed in as {signedInAs}, and the invitation is for another address. Sign out to accept it.</p>
        <SignOut next={here} />
      </div>
    );
  }
  if (offer.account) {
    return (
      <p className="font-serif text-body">
        There is an account for this address.{" "}
        <Link href={`/sign-in?next=${encodeURIComponent(here)}&email=${encodeURIComponent(offer.email)}`}>Sign in to join</Link>.
      </p>
    );
  }
  return <JoinNewForm token={token} email={offer.email} />;
}
