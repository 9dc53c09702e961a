import { Cell, Table } from "@/components/ui/Table";
import { duration } from "@/lib/diagnosis/format";
import type { ControllerRow, Summary } from "@/lib/diagnosis/report";
import { count } from "@/lib/view/format";

type MeasuredLevels = NonNullable<Summary["levels"]>;

/** Lows lie millivolts apart. */
function volts(value: number): string {
  return `${value.toFixed(3).replace("-", "\u2212")}\u00a0V`;
}

const COLUMNS = [
  { key: "line", head: "level" },
  { key: "count", head: "measured", number: true },
  { key: "least", head: "least", number: true },
  { key: "median", head: "median", number: true },
  { key: "most", head: "most", number: true },
];

/** Settled levels of a capture in volts, and who stands where. */
export function Levels({ levels, controllers }: { levels: MeasuredLevels; controllers: readonly ControllerRow[] }) {
  const rows = [
    ["SCL low", levels.scl_low],
    ["SDA low", levels.sda_low],
    ["SDA high", levels.sda_high],
  ] as const;
  const drivers = controllers.filter((controller) => controller.vol_v !== null);
  return (
    <div className="mt-8">
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
        {drivers.length > 0 &&
          `${drivers.map(({ name, id, vol_v }) => `${name ?? id} pulls to ${volts(vol_v ?? 0)}`).join(", ")}. `}
        <Plateaus line="SDA" plateaus={levels.sda_plateaus ?? []} />
        <Plateaus line="SCL" plateaus={levels.scl_plateaus ?? []} />
      </p>
    </div>
  );
}

/** Worth a sentence only where there is more than one: as many drivers can be told apart by their level. */
function Plateaus({ line, plateaus }: { line: string; plateaus: NonNullable<MeasuredLevels["sda_plateaus"]> }) {
  if (plateaus.length < 2) return null;
  const each = plateaus.map(({ v, count: times }) => `${volts(v)} (${count(times)} times)`);
  return (
    <>
      Lows of {line} stand at {each.slice(0, -1).join(", ")} and {each.at(-1)}: so many drivers, alone or together, can be told
      apart.{" "}
    </>
  );
}
