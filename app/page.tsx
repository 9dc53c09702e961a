import Link from "next/link";
import { Masthead } from "@/components/account/Masthead";
import { FrontDoor } from "@/components/bench/FrontDoor";
import { buttonClass } from "@/components/ui/Button";
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
            viewer.kind === "member" ? (
              <Link href="/cases/new" className={buttonClass("word")}>
                keep it in a case
              </Link>
            ) : (
              <Link href="/sign-in" className={buttonClass("word")}>
                sign in to keep it
              </Link>
            )
          }
        />
      </main>
    </>
  );
}
