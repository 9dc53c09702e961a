import type { Metadata } from "next";
import type { ReactNode } from "react";
import { Masthead } from "@/components/account/Masthead";
import { Cautions } from "@/components/bench/Cautions";
import { Calibration } from "@/components/help/Calibration";
import { Keys } from "@/components/help/Keys";
import { EvidenceKinds, Words } from "@/components/help/Words";
import { CALIBRATION } from "@/lib/forensics/calibration";
import { pageViewer } from "@/lib/server/access/page";
import { nameplate } from "@/lib/server/access/viewer";

export const metadata: Metadata = { title: "Help" };

export default async function HelpPage() {
  return (
    <>
      <Masthead person={nameplate(await pageViewer())} context="help" />
      <main className="mx-auto max-w-[90rem] px-4 py-8 sm:px-10">
        <h1 className="font-serif text-head">Help</h1>
        <p className="mt-2 max-w-[68ch] font-serif text-lede">
          Drop a CSV or VCD of SCL and SDA on the front page. The sentences at the top say what happened; every figure under them
          can be followed to its place in the trace.
        </p>
        <Part id="words" title="Words">
          <Words />
          <p className="mt-3 max-w-[68ch] font-serif text-body text-quiet">
            All other terms are those of the I2C-bus specification UM10204 and of the SMBus specification, as they write them.
          </p>
        </Part>
        <Part id="keys" title="Keys">
          <Keys />
        </Part>
        <Part id="evidence" title="Evidence of a contest">
          <p className="mt-2 max-w-[68ch] font-serif text-body">
            On the wire only the AND of all drivers is visible, so a contest is inferred. Each observation is weighed in bits of
            log-odds: +1 bit doubles the odds that there was a contest, −1 bit halves them. Where the controllers are too alike,
            or the sampling too slow, nothing on these lines could show it, and that is said.
          </p>
          <EvidenceKinds />
        </Part>
        <Part id="sure" title="How sure is sure">
          <Calibration figures={CALIBRATION} />
        </Part>
        <Part id="cautions" title="Cautions">
          <div className="mt-2">
            <Cautions />
          </div>
        </Part>
      </main>
    </>
  );
}

function Part({ id, title, children }: { id: string; title: string; children: ReactNode }) {
  return (
    <section aria-labelledby={id} className="mt-10">
      <h2 id={id} className="border-b border-ink font-serif text-xl italic">
        {title}
      </h2>
      {children}
    </section>
  );
}
