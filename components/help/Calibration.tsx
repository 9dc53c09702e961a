import { Cell, Table } from "@/components/ui/Table";
import type { CalibrationFigures } from "@/lib/forensics/calibration-figures";
import { count, probability } from "@/lib/view/format";

function percent(share: number): string {
  return `${Number((share * 100).toFixed(1))} %`;
}

const rows = [
  { key: "stated", head: "Called" },
  { key: "claims", head: "Claims", number: true },
  { key: "mean", head: "On average", number: true },
  { key: "real", head: "Were real", number: true },
];

const thresholds = [
  { key: "threshold", head: "Taken from", number: true },
  { key: "found", head: "Of all contests found", number: true },
  { key: "false", head: "False, per 2 000 others", number: true },
];

/** How sure is sure: what was claimed against what was so, on simulated buses whose truth is known. */
export function Calibration({ figures }: { figures: CalibrationFigures }) {
  const { corpus, reliability, roc, visible, tapped, untapped, attribution } = figures;
  return (
    <>
      <p className="mt-2 max-w-[68ch] font-serif text-body">
        A probability is worth something only if it comes true that often. The same inference was run over{" "}
        {count(figures.captures)} simulated buses with {count(figures.transactions)} transactions and {count(figures.contests)}{" "}
        contests, of which everything is known (seeds {corpus.first} to {corpus.first + corpus.count - 1}; clocks, sampling,
        noise, stretching and retries vary). Expected calibration error:{" "}
        <span className="tabular text-hex">{figures.ece.toFixed(3)}</span>. Causes of wrong answers were looked for on other buses
        of the same kind, never on these. A real bus may do what no simulated one does.
      </p>
      <div className="mt-5 grid gap-x-12 gap-y-8 lg:grid-cols-[1fr_1fr]">
        <div>
          <Table caption="Contests by their stated probability, drive taps left out" captioned columns={rows}>
            {reliability.map((row) => (
              <tr key={row.from}>
                <Cell className="tabular text-hex">
                  {row.from.toFixed(2)} to {Math.min(1, row.to).toFixed(2)}
                </Cell>
                <Cell number>{count(row.claims)}</Cell>
                <Cell number>{probability(row.stated)}</Cell>
                <Cell number>{row.claims === 0 ? "–" : percent(row.real)}</Cell>
              </tr>
            ))}
          </Table>
          <Reliability rows={reliability} />
        </div>
        <div>
          <Table caption="What is found when contests from a probability on are taken" captioned columns={thresholds}>
            {roc.map((row) => (
              <tr key={row.threshold}>
                <Cell number>{row.threshold.toFixed(2)}</Cell>
                <Cell number>{percent(row.found)}</Cell>
                <Cell number>{row.falsePer2000.toFixed(2)}</Cell>
              </tr>
            ))}
          </Table>
          <p className="mt-2 max-w-[56ch] font-serif text-body">
            Many contests leave no trace on two wires: both controllers' clocks are alike, or the sampling is too slow to tell.
            They are among those not found. Many of the false ones stand in a few captures where one controller was not told from
            the others: look at the number of controllers first.
          </p>
          <ul className="mt-4 max-w-[56ch] space-y-1.5 font-serif text-body">
            <li>
              Of the {count(visible.contests)} contests that an observer who knows every device's true timing would put at 0.9 or
              more, found: {percent(visible.found)}; of those the deciding bit exact: {percent(visible.exactBit)}, both parties
              right: {percent(visible.bothParties)}.
            </li>
            <li>
              Where the one that yielded has a drive tap, {count(tapped.contests)} contests: found {percent(tapped.found)},
              deciding bit exact {percent(tapped.exactBit)}, false {count(tapped.false)}. Where only others have one,{" "}
              {count(untapped.contests)}: found {percent(untapped.found)}, exact {percent(untapped.exactBit)}.
            </li>
            <li>
              Who sent an uncontested transaction: told for {percent(attribution.given)}, right in {percent(attribution.right)} of
              those.
            </li>
          </ul>
        </div>
      </div>
    </>
  );
}

const SIDE = 220;
const EDGE = 26;

/** Claimed against real: on the line they agree. The area of a mark is its number of claims. */
function Reliability({ rows: bins }: { rows: CalibrationFigures["reliability"] }) {
  const most = Math.max(1, ...bins.map((bin) => bin.claims));
  const x = (share: number) => EDGE + share * SIDE;
  const y = (share: number) => 8 + (1 - share) * SIDE;
  return (
    <figure className="mt-5">
      <svg
        width={SIDE + EDGE + 12}
        height={SIDE + EDGE + 14}
        role="img"
        aria-label="Claimed probability against the share that was real; the table above has the same figures"
        className="max-w-full"
      >
        <path d={`M${x(0)} ${y(1)}V${y(0)}H${x(1)}`} fill="none" className="stroke-ink" strokeWidth="1" />
        <path d={`M${x(0)} ${y(0)}L${x(1)} ${y(1)}`} className="stroke-field" strokeWidth="1" strokeDasharray="3 3" />
        {bins
          .filter((bin) => bin.claims > 0)
          .map((bin) => (
            <circle
              key={bin.from}
              cx={x(bin.stated)}
              cy={y(bin.real)}
              r={2.5 + 8 * Math.sqrt(bin.claims / most)}
              className="fill-contest/25 stroke-contest"
              strokeWidth="1.2"
            />
          ))}
        {[0, 0.5, 1].map((share) => (
          <g key={share} className="fill-quiet font-mono text-[11px]">
            <text x={x(share)} y={y(0) + 16} textAnchor="middle">
              {share}
            </text>
            <text x={EDGE - 6} y={y(share) + 4} textAnchor="end">
              {share}
            </text>
          </g>
        ))}
      </svg>
      <figcaption className="font-sans text-small text-quiet">claimed, to the right; real, upwards</figcaption>
    </figure>
  );
}
