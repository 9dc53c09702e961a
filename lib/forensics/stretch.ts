// In: every low, its controller's own habit, and which messages were contested. Out: clock stretches: where, how long, by whom.
// UM10204 3.1.9. The excess is over the controller's own low inside bytes. A target stretches in its own transactions, whoever
// asks; a controller that is late with its next byte is late with every target: the two are told apart by that.

import type { Timebase } from "../base/time";
import type { Stretch } from "../diagnosis/report";
import type { Census } from "./census";
import { type Ledger, VALUE } from "./ledger";
import { LOW_FIRST, LOW_IN, type Messages } from "./message";
import type { Sampling, Signature } from "./signature";

/** Longest low that still is the controller's own. */
interface Reach {
  readonly own: number;
  readonly limit: number;
}

export interface StretchContext {
  readonly ledger: Ledger;
  readonly messages: Messages;
  readonly census: Census;
  /** Controller per message after contests were settled. */
  readonly by: Int16Array;
  /** Per message, last entry in which more than one controller clocked; 0 where there was no contest. */
  readonly contestedUntil: Float64Array;
  readonly address: Int16Array;
  readonly sampling: Sampling;
  readonly timebase: Timebase;
}

/** Places in a byte that are kept apart: before its first bit, inside, before the ninth. */
type Spot = 0 | 1 | 2;

interface Long {
  readonly transaction: number;
  readonly pulse: number;
  readonly controller: number;
  readonly spot: Spot;
  readonly low: number;
  readonly own: number;
}

/** What one controller's transactions with one address show at one spot. */
interface Cell {
  all: number;
  long: number;
  /** Sum of the logarithms of the long lows. */
  logs: number;
}

export function stretchesOf(context: StretchContext): Stretch[] {
  const cells = new Map<string, Cell>();
  const longs = longLows(context, cells);
  const settled = new Map<string, Stretch["by"]>();
  const perSecond = context.timebase.ticksPerSecond;
  return longs.map((l) => ({
    transaction: l.transaction,
    byte: Math.floor(l.pulse / 9),
    bit: l.pulse % 9,
    start_s: (context.ledger.riseTick(l.transaction, l.pulse) - l.low) / perSecond,
    low_s: l.low / perSecond,
    excess_s: (l.low - l.own) / perSecond,
    by: holder(context, cells, settled, l),
  }));
}

function reachOf(signature: Signature, habit: number, sampling: Sampling): Reach {
  const inside = signature.habits[LOW_IN];
  const figure = signature.habits[habit] ?? inside;
  if (figure === null || inside === null) return { own: Number.POSITIVE_INFINITY, limit: Number.POSITIVE_INFINITY };
  const sd = Math.sqrt(figure.jitter + 2 * sampling.variance);
  return { own: figure.mean, limit: figure.mean + Math.max(6 * sd, 2.1 * sampling.step, 0.08 * inside.mean) };
}

function longLows(context: StretchContext, cells: Map<string, Cell>): Long[] {
  const { ledger, messages, census, by, sampling } = context;
  const table = census.signatures.map((s) => [reachOf(s, LOW_IN, sampling), reachOf(s, LOW_FIRST, sampling)]);
  if (table.length === 0) return [];
  const longest = [0, 1].map((i) => table.map((r) => r[i]).reduce((x, y) => (y.limit > x.limit ? y : x)));
  const out: Long[] = [];
  for (let m = 0; m < messages.count; m++) {
    const c = by[m];
    const [inside, first] = c >= 0 ? table[c] : longest;
    for (let t = messages.first[m]; t < messages.first[m + 1]; t++) {
      const base = ledger.openEntry[t] + 1;
      const pulses = ledger.pulses(t);
      const bytes = Math.floor(pulses / 9);
      count(cells, c, context.address[t], bytes);
      let bit = 0;
      for (let p = 0; p < pulses; p++) {
        const low = ledger.low[base + p];
        const reach = p === 0 ? first : inside;
        if (low > reach.limit && (base + p > context.contestedUntil[m] || low > longest[0].limit)) {
          const spot: Spot = bit === 0 ? 0 : bit === 8 ? 2 : 1;
          out.push({ transaction: t, pulse: p, controller: c, spot, low, own: reach.own });
          if (p > 0) note(cells, c, context.address[t], spot, low);
        }
        bit = bit === 8 ? 0 : bit + 1;
      }
    }
  }
  return out;
}

function keyOf(controller: number, address: number, spot: Spot): string {
  return `${spot} ${controller} ${address}`;
}

function cellOf(cells: Map<string, Cell>, key: string): Cell {
  let cell = cells.get(key);
  if (cell === undefined) {
    cell = { all: 0, long: 0, logs: 0 };
    cells.set(key, cell);
  }
  return cell;
}

function count(cells: Map<string, Cell>, controller: number, address: number, bytes: number): void {
  if (bytes === 0) return;
  cellOf(cells, keyOf(controller, address, 0)).all += bytes - 1;
  cellOf(cells, keyOf(controller, address, 1)).all += 7 * bytes;
  cellOf(cells, keyOf(controller, address, 2)).all += bytes;
}

function note(cells: Map<string, Cell>, controller: number, address: number, spot: Spot, low: number): void {
  const cell = cellOf(cells, keyOf(controller, address, spot));
  cell.long++;
  cell.logs += Math.log(low);
}

/** Least number of chances a cell must have had to say anything. */
const SPEAKS = 3;

/** Share of long lows elsewhere, those of about the same length counting whole; NaN where nothing is known. */
function elsewhere(cells: Map<string, Cell>, l: Long, address: number, sameController: boolean): number {
  let all = 0;
  let alike = 0;
  for (const [key, cell] of cells) {
    const [spot, c, a] = key.split(" ").map(Number);
    if (spot !== l.spot || c < 0 || cell.all < SPEAKS) continue;
    if (sameController ? c !== l.controller || a === address : c === l.controller || a !== address) continue;
    all += cell.all;
    if (cell.long === 0) continue;
    const ratio = Math.abs(cell.logs / cell.long - Math.log(l.low));
    alike += cell.long * Math.max(0.3, 1 - ratio);
  }
  return all > 0 ? alike / all : Number.NaN;
}

/** Settles once per cell who holds there. */
function holder(context: StretchContext, cells: Map<string, Cell>, settled: Map<string, Stretch["by"]>, l: Long): Stretch["by"] {
  if (l.pulse < 8) return "unknown";
  const address = context.address[l.transaction];
  const key = keyOf(l.controller, address, l.spot);
  let by = settled.get(key);
  if (by === undefined) {
    by = settle(cells, l, address);
    settled.set(key, by);
  }
  return by === "unknown" && l.spot === 0 ? handover(context.ledger, l) : by;
}

function settle(cells: Map<string, Cell>, l: Long, address: number): Stretch["by"] {
  const here = cellOf(cells, keyOf(l.controller, address, l.spot));
  const rate = here.long / Math.max(1, here.all);
  const own = elsewhere(cells, l, address, true);
  const others = elsewhere(cells, l, address, false);
  // Before the ninth pulse it is the target that has to make up its mind; inside a byte controllers keep their time.
  const fallback: Stretch["by"] = l.spot === 0 ? "unknown" : "target";
  if (Number.isNaN(own) && Number.isNaN(others)) return fallback;
  const controller = Number.isNaN(own) ? 0 : Math.min(1, own / rate);
  const target = Number.isNaN(others) ? 0 : Math.min(1, others / rate);
  if (controller > 0.5 && controller > target + 0.2) return "controller";
  if (target > 0.5 && target > controller + 0.2) return "target";
  // Other addresses of this controller are free of it, or the same target is with other controllers.
  if (!Number.isNaN(own) && controller < 0.3) return "target";
  if (!Number.isNaN(others) && target < 0.3) return l.spot === 0 ? "controller" : fallback;
  return fallback;
}

/** Before a next byte: a controller that is late puts its first bit on SDA late, near the end of the low. */
function handover(ledger: Ledger, l: Long): Stretch["by"] {
  const entry = ledger.openEntry[l.transaction] + 1 + l.pulse;
  const late = ledger.lastMove(entry) > 0.75 * ledger.low[entry];
  const acknowledged = (ledger.what[entry - 1] & VALUE) === 0;
  return late || !acknowledged ? "controller" : "target";
}
