import { Cell, Table } from "@/components/ui/Table";
import type { Summary } from "@/lib/diagnosis/report";
import { count, duration, volts } from "@/lib/view/format";

const COLUMNS = [
  { key: "line", head: "level" },
  { key: "count", head: "measured", number: true },
  { key: "least", head: "least", number: true },
  { key: "median", head: "median", number: true },
  { key: "most", head: "most", number: true },
];

function ohms(value: number): string {
  return value >= 1000 ? `${(value / 1000).toFixed(2)}\u00a0kΩ` : `${Math.round(value)}\u00a0Ω`;
}

/** Settled levels of a capture in volts, and what they say of the pull-ups. */
export function Levels({ levels }: { levels: NonNullable<Summary["levels"]> }) {
  const rows = [
    ["SCL low", levels.scl_low],
    ["SDA low", levels.sda_low],
    ["SDA high", levels.sda_high],
  ] as const;
  return (
    <div className="mt-6">
      <Table caption="Levels" captioned columns={COLUMNS}>
        {rows.map(
          ([name, level]) =>
            level && (
              <tr key={name}>
                <th scope="row" className="py-1.5 pr-5 text-left font-normal">
                  {name}
                </th>
                <Cell number>{count(level.count)}</Cell>
                <Cell number>{volts(level.min_v)}</Cell>
                <Cell number>{volts(level.p50_v)}</Cell>
                <Cell number>{volts(level.max_v)}</Cell>
              </tr>
            ),
        )}
      </Table>
      <p className="mt-2 max-w-[80ch] font-serif text-body">
        {levels.rc_s !== null && `The lines rise with a time constant of ${duration(levels.rc_s)}. `}
        {levels.rp_min_ohm !== null && `The drivers of this profile can sink a pull-up of ${ohms(levels.rp_min_ohm)} or more. `}
        {levels.rc_max_s !== null && `A rise in time needs a time constant of at most ${duration(levels.rc_max_s)}.`}
      </p>
    </div>
  );
}
