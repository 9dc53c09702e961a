"use client";

import { useState } from "react";
import { Button } from "@/components/ui/Button";
import { Field } from "@/components/ui/Field";
import { Select } from "@/components/ui/Select";
import type { AnalysisSettings } from "@/lib/diagnosis/analysis";
import type { CaptureHead, TapChoice } from "@/lib/engine/samples/reader";
import { PROFILE_NAMES } from "@/lib/limits/profile";
import { Taps } from "./Taps";

export interface SettingsProps {
  settings: AnalysisSettings;
  head: CaptureHead;
  onSettings: (settings: AnalysisSettings) => void;
}

function numberIn(text: string): number | null | undefined {
  if (text.trim() === "") return undefined;
  const value = Number(text.replace(",", "."));
  return Number.isFinite(value) ? value : null;
}

/** How the capture is read and judged. A change reads the file again. */
export function Settings({ settings, head, onSettings }: SettingsProps) {
  const named = typeof settings.limits === "string" ? settings.limits : "";
  const [limits, setLimits] = useState(named);
  const [capacitance, setCapacitance] = useState(settings.cb_pf === null ? "" : String(settings.cb_pf));
  const [vdd, setVdd] = useState(settings.read.vdd_v === undefined ? "" : String(settings.read.vdd_v));
  const [interval, setInterval] = useState(settings.read.interval_s === undefined ? "" : String(settings.read.interval_s));
  const [taps, setTaps] = useState<readonly TapChoice[]>(settings.read.taps ?? head.taps);
  const [pullup, setPullup] = useState(settings.read.pullup ?? true);
  const own = settings.limits !== null && typeof settings.limits !== "string";
  const values = { cb: numberIn(capacitance), vdd: numberIn(vdd), interval: numberIn(interval) };
  const wrong = (value: number | null | undefined) =>
    value === null || (value !== undefined && value <= 0) ? "a number above 0" : undefined;

  function apply() {
    if (wrong(values.cb) || wrong(values.vdd) || wrong(values.interval)) return;
    const { vdd_v: _vdd, interval_s: _interval, pullup: _pullup, taps: _taps, ...read } = settings.read;
    const used = taps.filter((tap) => tap.label.trim() !== "" && (tap.scl !== null || tap.sda !== null));
    onSettings({
      ...settings,
      limits: own && limits === "" ? settings.limits : limits === "" ? null : limits,
      cb_pf: values.cb ?? null,
      read: {
        ...read,
        ...(values.vdd ? { vdd_v: values.vdd } : {}),
        ...(values.interval ? { interval_s: values.interval } : {}),
        ...(pullup ? {} : { pullup: false }),
        ...(used.length > 0 ? { taps: used } : {}),
      },
    });
  }

  return (
    <details className="screen-only font-sans text-label text-quiet">
      <summary className="w-fit border-b border-field hover:text-ink">how it is read and judged</summary>
      <form
        className="mt-3 grid max-w-[56rem] gap-x-8 gap-y-3 sm:grid-cols-2 lg:grid-cols-4"
        onSubmit={(event) => {
          event.preventDefault();
          apply();
        }}
      >
        <Select
          label="limits"
          value={limits}
          onChange={(event) => setLimits(event.target.value)}
          options={[
            { value: "", text: own ? "the team's own profile" : "slowest mode that fits" },
            ...PROFILE_NAMES.map((name) => ({ value: name, text: name })),
          ]}
        />
        {limits === "High-speed" && (
          <Field
            label="bus capacitance, pF"
            value={capacitance}
            inputMode="decimal"
            onChange={(event) => setCapacitance(event.target.value)}
            error={wrong(values.cb)}
          />
        )}
        {head.levels === "volts" && (
          <Field
            label="supply VDD, V"
            value={vdd}
            placeholder={head.vdd_v === null ? "" : head.vdd_v.toFixed(2)}
            inputMode="decimal"
            onChange={(event) => setVdd(event.target.value)}
            error={wrong(values.vdd)}
          />
        )}
        {head.timebase.origin !== "file" && (
          <Field
            label="seconds between samples"
            value={interval}
            placeholder="1e-7"
            inputMode="decimal"
            onChange={(event) => setInterval(event.target.value)}
            error={wrong(values.interval)}
          />
        )}
        {head.format === "vcd" && (
          <label className="flex items-baseline gap-2">
            <input
              type="checkbox"
              checked={pullup}
              onChange={(event) => setPullup(event.target.checked)}
              className="accent-[rgb(var(--accent))]"
            />
            a pull-up makes z a high
          </label>
        )}
        {head.channels.length > 2 && <Taps taps={taps} channels={head.channels} onTaps={setTaps} />}
        <div className="self-end">
          <Button type="submit">read it so</Button>
        </div>
      </form>
    </details>
  );
}
