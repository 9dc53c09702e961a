import { type ReactNode, useState } from "react";
import { Field } from "@/components/ui/Field";
import { capacitance, duration, resistance } from "@/lib/diagnosis/format";
import type { Summary } from "@/lib/diagnosis/report";
import { edgePoints } from "@/lib/limits/edges";
import { builtIn, isProfileName, type Profile } from "@/lib/limits/profile";
import { advisePullUp, driveOf, type PullUpAdvice } from "@/lib/limits/pullup";

/** A typed figure; null where nothing usable stands. */
function typed(text: string): number | null {
  const value = Number(text.trim().replace(",", "."));
  return text.trim() !== "" && Number.isFinite(value) && value > 0 ? value : null;
}

function complaint(text: string): string | undefined {
  return text.trim() !== "" && typed(text) === null ? "a number above 0" : undefined;
}

interface Given {
  readonly vdd: number | null;
  readonly farad: number | null;
  readonly ohm: number | null;
}

/** Which pull-ups this bus could have: Rp(min) and Rp(max) of the mode from supply, capacitance and measured rise. */
export function PullUps({ summary }: { summary: Summary }) {
  const [vdd, setVdd] = useState("");
  const [picofarads, setPicofarads] = useState("");
  const [ohms, setOhms] = useState("");
  const mode = summary.limits.base ?? summary.limits.profile;
  if (!isProfileName(mode)) return null;
  const measured = summary.capture.vdd_v;
  const pf = typed(picofarads);
  const given: Given = { vdd: typed(vdd) ?? measured, farad: pf === null ? null : pf * 1e-12, ohm: typed(ohms) };
  return (
    <section aria-label="Pull-ups" className={`keep-together mt-8 max-w-[80ch] ${given.vdd === null ? "screen-only" : ""}`}>
      <h3 className="border-b border-ink font-serif text-lg italic">Pull-ups</h3>
      <div className="screen-only mt-3 grid gap-5 sm:grid-cols-3">
        <Field
          label="VDD, V"
          inputMode="decimal"
          autoComplete="off"
          value={vdd}
          placeholder={measured === null ? "" : measured.toFixed(2)}
          error={complaint(vdd)}
          onChange={(event) => setVdd(event.target.value)}
        />
        <Field
          label="Capacitance of a line, pF"
          inputMode="decimal"
          autoComplete="off"
          value={picofarads}
          error={complaint(picofarads)}
          onChange={(event) => setPicofarads(event.target.value)}
        />
        <Field
          label="Pull-up fitted, Ω"
          inputMode="decimal"
          autoComplete="off"
          value={ohms}
          error={complaint(ohms)}
          onChange={(event) => setOhms(event.target.value)}
        />
      </div>
      {given.vdd === null ? (
        <p className="mt-3 font-serif text-body">
          A recording in levels does not tell VDD: type it to see the range of the pull-ups.
        </p>
      ) : (
        <Advice mode={builtIn(mode)} summary={summary} given={{ ...given, vdd: given.vdd }} />
      )}
      <p className="mt-2 font-sans text-small text-quiet">
        UM10204 7.1: Rp(min) = (VDD − VOL) / IOL, Rp(max) = tr / (0.8473 Cb). Every device must sink what Rp(min) asks for, and
        leakage and series resistors narrow the range: the specification and the devices' data sheets decide, not this sentence.
      </p>
    </section>
  );
}

interface AdviceProps {
  mode: Profile;
  summary: Summary;
  given: Given & { readonly vdd: number };
}

function Advice({ mode, summary, given: { vdd, farad, ohm } }: AdviceProps) {
  const rc = summary.levels?.rc_s ?? null;
  const limit = summary.measurements.find((row) => row.parameter === "tr")?.limit_max_s ?? (mode.limits.tr?.max ?? 0) / 1e9;
  const implied = ohm !== null && rc !== null ? rc / ohm : null;
  const points = edgePoints({ vdd_v: vdd, vil_v: 0.3 * vdd, vih_v: 0.7 * vdd }, mode);
  const advice = advisePullUp({
    profile: mode.name,
    vdd,
    riseLimitS: limit,
    ...(mode.spec === "SMBus" && { risePerRc: points.limitPerRc }),
    capacitanceF: farad ?? implied,
    pullUpOhm: null,
    measuredRiseS: null,
  });
  const { lowV, sinkA } = driveOf(mode.name, vdd);
  const most = (mode.limits.Cb?.max ?? Number.POSITIVE_INFINITY) * 1e-12;
  return (
    <div className="mt-3 space-y-1 font-serif text-body">
      <p>
        <Strong>Rp(min) {resistance(advice.rpMin_ohm)}</Strong>: a driver of {mode.name} sinks {sinkA * 1000} mA at{" "}
        {Number(lowV.toFixed(2))} V.{" "}
        {advice.rpMax_ohm === null ? (
          <>Rp(max) needs the capacitance of a line, or the pull-up that is fitted.</>
        ) : (
          <>
            <Strong>Rp(max) {resistance(advice.rpMax_ohm)}</Strong>: {capacitance(advice.capacitance_f ?? 0)} must rise in{" "}
            {duration(limit)}.
          </>
        )}
      </p>
      {rc !== null && (
        <p>
          The lines rise with RC {duration(rc)}
          {implied === null
            ? "; with the pull-up that is fitted that gives the capacitance"
            : `; with ${resistance(ohm ?? 0)} that is ${capacitance(implied)}`}
          .
        </p>
      )}
      <Judged advice={advice} ohm={ohm} most={most} />
    </div>
  );
}

function Judged({ advice, ohm, most }: { advice: PullUpAdvice; ohm: number | null; most: number }) {
  const { rpMin_ohm: least, rpMax_ohm: greatest, passive, capacitance_f: farad } = advice;
  return (
    <>
      {farad !== null && farad > most && (
        <p className="text-broken">
          {capacitance(farad)} is more than the {capacitance(most)} that the mode allows on a line.
        </p>
      )}
      {!passive && (
        <p className="text-broken">
          No passive solution: no resistor is both large enough to be pulled down and small enough to rise in time. Less
          capacitance, a slower mode, a current source or a switched pull-up would do (UM10204 5.1).
        </p>
      )}
      {ohm !== null && ohm < least && (
        <p className="text-broken">
          {resistance(ohm)} is too small: a driver that sinks no more than it must does not reach its low level.
        </p>
      )}
      {ohm !== null && greatest !== null && ohm > greatest && (
        <p className="text-broken">{resistance(ohm)} is too large: the line rises too slowly.</p>
      )}
      {ohm !== null && passive && greatest !== null && ohm >= least && ohm <= greatest && (
        <p>{resistance(ohm)} lies within the range.</p>
      )}
    </>
  );
}

function Strong({ children }: { children: ReactNode }) {
  return <span className="whitespace-nowrap font-semibold">{children}</span>;
}
