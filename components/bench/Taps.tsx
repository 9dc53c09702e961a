"use client";

import { Button } from "@/components/ui/Button";
import { Field } from "@/components/ui/Field";
import { Select } from "@/components/ui/Select";
import type { Channel, TapChoice } from "@/lib/engine/samples/reader";

export interface TapsProps {
  taps: readonly TapChoice[];
  channels: readonly Channel[];
  onTaps: (taps: readonly TapChoice[]) => void;
}

const MOST = 8;

/** Drive taps: further channels that show what one controller itself drives. They make a contest certain. */
export function Taps({ taps, channels, onTaps }: TapsProps) {
  const options = [
    { value: "", text: "not tapped" },
    ...channels
      .filter((channel) => channel.kind !== "other")
      .map((channel) => ({ value: channel.id, text: channel.name ? `${channel.name} (${channel.id})` : channel.id })),
  ];
  const change = (place: number, by: Partial<TapChoice>) => onTaps(taps.map((tap, k) => (k === place ? { ...tap, ...by } : tap)));
  return (
    <fieldset className="col-span-full border-0 border-t border-hairline p-0 pt-2">
      <legend className="sr-only">Drive taps</legend>
      {taps.map((tap, place) => (
        // biome-ignore lint/suspicious/noArrayIndexKey: a tap has no identity but its place while it is being written
        <div key={place} className="mb-2 grid items-end gap-x-6 gap-y-1 sm:grid-cols-[10rem_1fr_1fr_11rem_auto]">
          <Field label="drive tap of" value={tap.label} onChange={(event) => change(place, { label: event.target.value })} />
          <Select
            label="its SCL"
            value={tap.scl ?? ""}
            options={options}
            onChange={(event) => change(place, { scl: event.target.value || null })}
          />
          <Select
            label="its SDA"
            value={tap.sda ?? ""}
            options={options}
            onChange={(event) => change(place, { sda: event.target.value || null })}
          />
          <Select
            label="a 1 means"
            value={tap.polarity}
            options={[
              { value: "release", text: "it lets go" },
              { value: "drive", text: "it pulls low" },
            ]}
            onChange={(event) => change(place, { polarity: event.target.value === "drive" ? "drive" : "release" })}
          />
          <Button look="word" onClick={() => onTaps(taps.filter((_, k) => k !== place))}>
            remove
          </Button>
        </div>
      ))}
      {taps.length < MOST && (
        <Button
          look="word"
          onClick={() => onTaps([...taps, { label: `controller ${taps.length + 1}`, scl: null, sda: null, polarity: "release" }])}
        >
          add a drive tap
        </Button>
      )}
    </fieldset>
  );
}
