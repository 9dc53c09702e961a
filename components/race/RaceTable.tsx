import { Cell, Table } from "@/components/ui/Table";
import { count } from "@/lib/view/format";
import { drawnSlots, isNinth, type Race, slotText } from "@/lib/view/race";

/** The drawing as a table, slot by slot, for those who hear the page and for copying. */
export function RaceTable({ race }: { race: Race }) {
  const { from, to } = drawnSlots(race);
  const columns = [
    { key: "slot", head: "Bit", number: true },
    { key: "kept", head: race.keptName },
    ...race.leavers.map((leaver, k) => ({ key: `leaver${k}`, head: leaver.name })),
    { key: "bus", head: "Bus" },
  ];
  const slots = Array.from({ length: to - from }, (_, k) => from + k);
  return (
    <details className="mt-2 font-sans text-label">
      <summary className="w-fit border-b border-field text-quiet hover:text-ink">the same as a table</summary>
      <div className="mt-2 max-w-xl">
        <Table caption={`Bits of the contest in transaction ${race.transaction}`} columns={columns}>
          {slots.map((slot) => (
            <tr key={slot} className={race.leavers.some((leaver) => leaver.yielding.at === slot) ? "text-contest" : ""}>
              <Cell number>{bitOf(race, slot)}</Cell>
              <Cell>{spoken(slotText(race.kept[slot], race.bus[slot], isNinth(race, slot)))}</Cell>
              {race.leavers.map((leaver, k) => (
                // biome-ignore lint/suspicious/noArrayIndexKey: their order is what tells them apart
                <Cell key={k}>
                  {slot > leaver.yielding.at
                    ? "released"
                    : slotText(leaver.yielding.intent[slot] ?? null, race.bus[slot], isNinth(race, slot))}
                  {slot === leaver.yielding.at && ", yields"}
                </Cell>
              ))}
              <Cell>{spoken(String(race.bus[slot] ?? "·"))}</Cell>
            </tr>
          ))}
        </Table>
      </div>
    </details>
  );
}

function bitOf(race: Race, slot: number): string {
  const start = race.starts.findLast((entry) => entry <= slot) ?? 0;
  return typeof race.bus[slot] === "number" ? count(slot - start) : "";
}

function spoken(text: string): string {
  return text === "·" ? "not known" : text;
}
