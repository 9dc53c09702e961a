import { Masthead } from "@/components/account/Masthead";
import { FrontDoor } from "@/components/bench/FrontDoor";
import { pageViewer } from "@/lib/server/access/page";
import { nameplate } from "@/lib/server/access/viewer";

export default async function FrontPage() {
  const viewer = await pageViewer();
  return (
    <>
      <Masthead person={nameplate(viewer)} />
      <main>
        <FrontDoor
          keep={
            viewer.kind === "member"
              ? { href: "/cases/new", text: "keep it in a case" }
              : { href: `/sign-in?next=${encodeURIComponent("/cases/new")}`, text: "sign in to keep it" }
          }
        />
      </main>
    </>
  );
}
