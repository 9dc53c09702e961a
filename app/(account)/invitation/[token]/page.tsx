import type { Metadata } from "next";
import { Invitation } from "@/components/account/Invitation";
import { Sheet } from "@/components/account/Sheet";
import { pageViewer } from "@/lib/server/access/page";
import { fork } from "@/lib/server/database";
import { readOffer } from "@/lib/server/team/invitations";

export const metadata: Metadata = { title: "Invitation", robots: { index: false } };

export default async function InvitationPage({ params }: { params: Promise<{ token: string }> }) {
  const { token } = await params;
  const offer = await readOffer(await fork(), token);
  if (!offer) {
    return (
      <Sheet
        title="This invitation no longer works"
        lede="It was used or withdrawn, or it has expired. Ask the team for a new one."
      />
    );
  }
  const viewer = await pageViewer();
  return <Invitation token={token} offer={offer} signedInAs={viewer.kind === "guest" ? null : viewer.user.email} />;
}
