import type { BusSlot, Slot } from "@/lib/forensics/intent";
import { count } from "@/lib/view/format";
import { bracePath } from "@/lib/view/path";
import { bracesOf, drawnSlots, isNinth, laneLevels, lanePath, type Race, slotText } from "@/lib/view/race";
import { type Asked, type Lane, lanesOf } from "./lanes";

// Measures of the drawing, pixels.
const SLOT = 27;
/** Room for START before the first bit. */
const LEAD = 30;
// LANE and TOP also stand in the classes of the labels beside the drawing.
const LANE = 78;
const TOP = 22;
const HIGH = 8;
const LOW = 34;
const TEXT = 50;
/** Under the wired AND, for its braces and the words of the decision; also in the class of the first label below it. */
const SCORE = 44;
/** After the last slot, for words that stand beside a line. */
const TAIL = 24;

export interface BitRaceProps {
  race: Race;
  /** A message somebody asks about, drawn as one more lane; then the wired AND is what the bus would have shown. */
  asked: Asked | null;
}

/**
 * A contest bit by bit: a lane for each contender, the wired AND under them and each retry below it, the deciding bit in one
 * hatched column. Wide ones scroll inside; the same as a table stands under it for those who do not see it.
 */
export function BitRace({ race, asked }: BitRaceProps) {
  const lanes = lanesOf(race, asked);
  const { from, to } = drawnSlots(race);
  const slots = to - from;
  const height = TOP + lanes.length * LANE + SCORE;
  const bus = lanes.findIndex(({ key }) => key === "bus");
  const foot = TOP + (bus + 1) * LANE;
  const topOf = (lane: number) => TOP + lane * LANE + (lane > bus ? SCORE : 0);
  const x = (slot: number) => LEAD + (slot - from) * SLOT;
  const decisions = [
    ...new Set([...race.leavers.map((leaver) => leaver.yielding.at), ...(asked ? [asked.answer.meeting.at] : [])]),
  ];
  const beside = lanes.some((lane) => lane.released !== null) ? 250 : 0;
  const width = LEAD + slots * SLOT + TAIL + Math.max(0, beside - Math.max(0, to - Math.min(...decisions, to) - 1) * SLOT);
  return (
    // biome-ignore lint/a11y/noNoninteractiveTabindex: what scrolls must be reachable by keyboard
    <section tabIndex={0} aria-label="Bit race" className="max-w-full overflow-x-auto print:overflow-visible">
      <div className="flex w-max print:w-auto">
        <ul className="sticky left-0 z-10 w-[7.5rem] shrink-0 bg-paper pr-3 pt-[22px] sm:w-[11.5rem]">
          {lanes.map((lane, k) => (
            <li
              key={lane.key}
              className={`h-[78px] overflow-hidden font-serif leading-[1.2] ${k === bus + 1 ? "mt-[44px]" : ""}`}
            >
              <p className="text-[1.0625rem] [overflow-wrap:anywhere]">{lane.name}</p>
              <p className={`text-small italic ${lane.tone === "contest" ? "text-contest" : "text-quiet"}`}>{lane.role}</p>
            </li>
          ))}
        </ul>
        <svg
          width={width}
          height={height}
          viewBox={`0 0 ${width} ${height}`}
          aria-hidden="true"
          className="shrink-0 print:h-auto print:max-w-[calc(100%-11.5rem)] print:shrink"
        >
          {decisions
            .filter((slot) => slot >= from && slot < to)
            .map((slot) => (
              <g key={slot}>
                <Deciding x={x(slot)} top={0} foot={foot} />
                {lanes.length > bus + 1 && <Deciding x={x(slot)} top={foot + SCORE} foot={height} />}
              </g>
            ))}
          {lanes.map((lane, k) => (
            <g key={lane.key} transform={`translate(0 ${topOf(k)})`}>
              <LaneLine lane={lane} race={race} bus={lanes[bus].intent} from={from} to={to} />
            </g>
          ))}
          <Score race={race} from={from} to={to} top={foot} known={!asked} at={asked?.answer.meeting.at ?? to} />
        </svg>
      </div>
    </section>
  );
}

function Deciding({ x, top, foot }: { x: number; top: number; foot: number }) {
  return (
    <g>
      <rect x={x} y={top + 4} width={SLOT} height={foot - top - 8} fill="url(#contest-hatch)" opacity="0.75" />
      <path
        d={`M${x} ${top}V${foot}M${x + SLOT} ${top}V${foot}`}
        className="stroke-contest"
        strokeWidth="1"
        strokeDasharray="3 3"
      />
    </g>
  );
}

interface LaneLineProps {
  lane: Lane;
  race: Race;
  bus: readonly Slot[];
  from: number;
  to: number;
}

function LaneLine({ lane, race, bus, from, to }: LaneLineProps) {
  const shown = race.bus as readonly BusSlot[];
  const levels = laneLevels(lane.intent, lane.key === "bus" ? race.bus : shown, lane.until).slice(from, to);
  const left = LEAD;
  // Up to START both lines rest high; a drawing that begins later says so by a dotted lead.
  const lead = from === 0 ? `M2 ${HIGH}H${LEAD / 2}V${LOW}H${LEAD}` : "";
  const join = from === 0 && levels[0] === 1 ? `M${LEAD} ${LOW}V${HIGH}` : "";
  const end = Math.min(to, lane.until + 1);
  const letGo = lane.released !== null && end >= from ? LEAD + (end - from) * SLOT : null;
  return (
    <>
      <path
        d={lead + join + lanePath(levels, { left, width: SLOT, high: HIGH, low: LOW })}
        fill="none"
        className="stroke-ink"
        strokeWidth={lane.weight}
        strokeLinejoin="miter"
      />
      {from > 0 && <path d={`M2 ${HIGH}H${LEAD - 3}`} className="stroke-quiet" strokeWidth="1.2" strokeDasharray="2 4" />}
      {letGo !== null && (
        <path
          d={`M${letGo} ${HIGH}H${LEAD + (to - from) * SLOT}`}
          className="stroke-quiet"
          strokeWidth="1.2"
          strokeDasharray="2 4"
        />
      )}
      {letGo !== null && (
        <text x={letGo + 8} y={HIGH + 18} className="fill-quiet font-serif text-[14px] italic">
          {lane.released}
        </text>
      )}
      {from === 0 && (
        <text x={LEAD / 2} y={TEXT} textAnchor="middle" className="condition fill-ink text-[14px]">
          S
        </text>
      )}
      {lane.intent.slice(from, Math.min(to, letGo === null ? to : end)).map((slot, k) => (
        // biome-ignore lint/suspicious/noArrayIndexKey: a slot is its place
        <SlotText key={k} lane={lane} slot={slot} at={from + k} bus={bus} race={race} x={LEAD + (k + 0.5) * SLOT} />
      ))}
    </>
  );
}

function SlotText({
  lane,
  slot,
  at,
  bus,
  race,
  x,
}: Pick<LaneLineProps, "lane" | "race" | "bus"> & { slot: Slot; at: number; x: number }) {
  const answered = bus[at];
  const text =
    lane.seen && isNinth(race, at) && (lane.key !== "bus" || race.kept[at] === "T") && typeof slot === "number"
      ? slot === 0
        ? "A"
        : "N"
      : slotText(slot, answered === "T" || answered === undefined ? null : answered, isNinth(race, at));
  const condition = slot === "P" || slot === "Sr";
  const marked = lane.marked.includes(at);
  const foreign = slot === "T" || slot === null || text === "A" || text === "N";
  const tone = marked ? "fill-contest font-semibold" : foreign ? "fill-quiet" : "fill-ink";
  return (
    <text
      x={x}
      y={TEXT}
      textAnchor="middle"
      className={`${condition ? "condition text-[14px]" : "font-mono text-[12.5px]"} ${tone}`}
    >
      {text}
    </text>
  );
}

interface ScoreProps {
  race: Race;
  from: number;
  to: number;
  top: number;
  /** Whether the bytes under the braces are those of the bus; else only those before `at` are. */
  known: boolean;
  at: number;
}

function Score({ race, from, to, top, known, at }: ScoreProps) {
  const decision = race.leavers.at(-1);
  const x = (slot: number) => LEAD + (slot - from) * SLOT;
  const words = decision
    ? `bit ${count(decision.contest.bit_index)} decides: ${decision.name} sends ${decision.yielding.intent[decision.yielding.at] ?? 1}, bus stays ${race.bus[decision.yielding.at] ?? "low"}`
    : "";
  const middle = decision ? x(decision.yielding.at) + SLOT / 2 : 0;
  return (
    <g transform={`translate(0 ${top})`}>
      {bracesOf(race)
        .filter((brace) => brace.from >= from && brace.to <= to && (known || brace.to <= at))
        .map((brace) => (
          <g key={brace.from}>
            <path
              d={bracePath(x(brace.from) + 2, x(brace.to) - 2, -14, 11)}
              fill="none"
              className="stroke-field"
              strokeWidth="1"
            />
            <text x={(x(brace.from) + x(brace.to)) / 2} y={12} textAnchor="middle" className="fill-ink font-mono text-[13px]">
              {brace.text}
            </text>
          </g>
        ))}
      {known && decision && (
        <text
          x={middle}
          y={33}
          textAnchor={middle > 190 ? "middle" : "start"}
          className="fill-contest font-serif text-[14.5px] italic"
        >
          {words}
        </text>
      )}
    </g>
  );
}
