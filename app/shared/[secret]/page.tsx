import type { Metadata } from "next";
import { headers } from "next/headers";
import { Header } from "@/components/header/Header";
import { SharedCase } from "@/components/share/SharedCase";
import { Unlock } from "@/components/share/Unlock";
import { fork } from "@/lib/server/database";
import { orNotFound } from "@/lib/server/http/page";
import { readShared } from "@/lib/server/shares/read";

export const metadata: Metadata = { title: "A shared case", robots: { index: false, follow: false }, referrer: "no-referrer" };

// No loading.tsx may stand above this page: a streamed answer has status 200 before a revoked link is found out.
export default async function SharedPage({ params }: { params: Promise<{ secret: string }> }) {
  const { secret } = await params;
  const cookies = (await headers()).get("cookie") ?? "";
  const shared = await orNotFound(readShared(await fork(), secret, cookies));
  const path = `/shared/${secret}`;
  if (shared.locked) {
    return (
      <>
        <Header />
        <main className="mx-auto max-w-[90rem] px-4 py-10 sm:px-10">
          <Unlock path={path} />
        </main>
      </>
    );
  }
  const { file, view, raw_allowed, expires_at } = shared;
  return (
    <>
      <Header context={`${file.team}, case ${file.number}`} />
      <main>
        <SharedCase shared={{ file, view, raw_allowed, expires_at }} path={path} />
      </main>
    </>
  );
}
