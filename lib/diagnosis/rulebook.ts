// In: edges, bits, transactions and spikes as they come. Out: what every rule found. Shows each rule what it asks for.

import type { Warning } from "../base/result";
import type { BitBlock, Spike } from "../engine/bits/bits";
import { CLOSE } from "../engine/bus/address";
import { ACK, type ByteBlock, FLAG, type TransactionBlock } from "../engine/bus/transactions";
import type { Remnant } from "../engine/decoder";
import type { EdgeBlock } from "../engine/samples/edges";
import type { CaptureHead } from "../engine/samples/reader";
import { FaultList } from "./findings";
import { LowSpans } from "./lows";
import { type Moment, Moments } from "./moments";
import { LineWatch, TransactionPlaces } from "./places";
import type { Fault, Harmless } from "./report";
import type { End, Row, Watch } from "./rule";
import { RULES } from "./rules";
import { FAULT_WORDS } from "./wording";

/** Bit times. Common practice, no source. */
const PAUSE_BITS = 100;

export class RuleBook {
  readonly places = new TransactionPlaces();
  private readonly list: FaultList;
  private readonly moments: Moments;
  private readonly lines = new LineWatch();
  private readonly lows = new LowSpans();
  private readonly watches: readonly Watch[];
  private readonly forRows: readonly Watch[];
  private readonly forSpikes: readonly Watch[];
  private row: Row | null = null;
  private lastCloses = 0;

  constructor(head: CaptureHead) {
    this.list = new FaultList(head.timebase);
    this.moments = new Moments(head, this.list);
    this.watches = Object.values(RULES).map((rule) => rule.watch(this.list));
    this.forRows = this.watches.filter((watch) => watch.transaction !== undefined);
    this.forSpikes = this.watches.filter((watch) => watch.spike !== undefined);
  }

  edges(block: EdgeBlock): void {
    this.lines.push(block);
  }

  bits(block: BitBlock): void {
    this.moments.bits(block);
    if (block.leads !== null) this.lows.bits(block);
  }

  spike(spike: Spike): void {
    const { tick, width, line } = spike;
    const sclHigh = line === "sda" ? this.lines.sclHighAt(tick) : null;
    const { slot } = this.moments;
    for (const watch of this.forSpikes) watch.spike?.(tick, width, line, sclHigh, slot);
  }

  remnant(remnant: Remnant): void {
    for (const watch of this.watches) watch.remnant?.(remnant);
  }

  transactions(block: TransactionBlock, bytes: ByteBlock): void {
    this.places.add(block);
    for (let i = 0; i < block.length; i++) {
      const row = this.fill(block, bytes, i);
      for (const watch of this.forRows) watch.transaction?.(row);
    }
    if (block.length > 0) this.lastCloses = block.closes[block.length - 1];
  }

  conclude(end: Pick<End, "head" | "tail" | "rows" | "profile" | "lookAlikes" | "stretches">): void {
    const whole: End = {
      ...end,
      lines: this.lines.atEnd(),
      lowSlot: (tick, width) => this.lows.slotOf(tick, width),
      period: this.moments.period,
      outside: this.moments.outside,
      lastTransaction: this.moments.lastTransaction,
      lastPulses: this.moments.pulses,
      lastCloses: this.lastCloses,
    };
    for (const watch of this.watches) watch.conclude?.(whole);
  }

  faults = (): Fault[] => this.list.faults((tick) => this.places.at(tick));
  harmless = (): Harmless[] => this.list.harmlessOnes((tick) => this.places.at(tick));
  totals = () => this.list.totals();

  warnings(): Warning[] {
    return this.list.unlisted().map(([kind, count]) => ({
      code: "faults-not-listed",
      message: `${count} more faults of the kind "${FAULT_WORDS[kind].title}" are counted but not listed.`,
      count,
    }));
  }

  private fill(block: TransactionBlock, bytes: ByteBlock, i: number): Row {
    const row = this.row ?? emptyRow(bytes);
    this.row = row;
    row.index = block.first + i;
    row.startTick = block.startTick[i];
    row.endTick = block.endTick[i];
    row.opens = block.opens[i];
    row.closes = block.closes[i];
    row.kind = block.kind[i];
    row.addressBytes = block.addressBytes[i];
    row.address = block.address[i];
    row.addressBits = block.addressBits[i];
    row.direction = block.direction[i];
    row.addressAck = block.addressAck[i];
    row.flags = block.flags[i];
    row.pulses = block.pulses[i];
    row.byteCount = block.byteCount[i];
    row.at = block.firstByte[i] - bytes.first;
    row.bytes = bytes;
    row.moments = this.withoutPauses(row, this.moments.take(row.index));
    return row;
  }

  // A controller that software clocks may pause under a high SCL: where the transaction then goes on and ends as it should, and
  // the pause was short, nobody held the line.
  private withoutPauses(row: Row, moments: readonly Moment[]): readonly Moment[] {
    const held = moments.find((moment) => moment.kind === "held-sda");
    const regular = row.addressAck === ACK && row.closes !== CLOSE.none && (row.flags & FLAG.shortByte) === 0;
    if (held === undefined || !regular || held.width > PAUSE_BITS * this.moments.period) return moments;
    return moments.filter((moment) => moment.kind !== "held-sda" && moment.kind !== "recovery");
  }
}

function emptyRow(bytes: ByteBlock): Row {
  return {
    index: 0,
    startTick: 0,
    endTick: 0,
    opens: 0,
    closes: 0,
    kind: 0,
    addressBytes: 0,
    address: 0,
    addressBits: 0,
    direction: 0,
    addressAck: 0,
    flags: 0,
    pulses: 0,
    byteCount: 0,
    at: 0,
    bytes,
    moments: [],
  };
}
