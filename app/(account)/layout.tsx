import type { ReactNode } from "react";
import { Masthead } from "@/components/account/Masthead";
import { pageViewer } from "@/lib/server/access/page";
import { nameplate } from "@/lib/server/access/viewer";

export default async function AccountLayout({ children }: { children: ReactNode }) {
  return (
    <>
      <Masthead person={nameplate(await pageViewer())} />
      <main className="mx-auto max-w-[90rem] px-4 py-10 sm:px-10">{children}</main>
    </>
  );
}
