// In: rows in time order. Out: the edges of the bus lines and of the drive taps, for captures in levels and in volts.

import { CUT, SCL, SCL_UNKNOWN, SDA, SDA_UNKNOWN } from "../edges";
import { BLOCK_ROWS, type RowBlock } from "./block";
import type { Comparator } from "./comparator";
import type { DigitalTap } from "./lines";
import type { RowTaker } from "./rows";
import type { EdgeWriter } from "./writer";

const SCL_BITS = [0, SCL, SCL_UNKNOWN];
const SDA_BITS = [0, SDA, SDA_UNKNOWN];

/** What can say a line's level at a row, whether it is a level itself or a voltage. */
export interface LevelSource {
  /** 0, 1, or 2 for unknown. */
  level(tick: number, cut: boolean): number;
}

/** A drive tap: written like the bus, 1 = released. A line that is not tapped is unknown. */
export interface TapLines {
  readonly scl: LevelSource | null;
  readonly sda: LevelSource | null;
  readonly inverted: boolean;
  readonly writer: EdgeWriter;
}

function takeTaps(taps: readonly TapLines[], tick: number, cut: boolean): void {
  for (const tap of taps) {
    const scl = tap.scl === null ? 2 : released(tap.scl.level(tick, cut), tap.inverted);
    const sda = tap.sda === null ? 2 : released(tap.sda.level(tick, cut), tap.inverted);
    tap.writer.put(tick, SCL_BITS[scl] | SDA_BITS[sda] | (cut ? CUT : 0));
  }
}

/** Level of a tap as the bus would have it: 1 = released, 2 = unknown. */
export function released(level: number, inverted: boolean): number {
  return inverted && level !== 2 ? 1 - level : level;
}

/** Bus lines that stand in the file as levels. */
export class LevelTaker implements RowTaker {
  /** Levels of the latest row, bits of EdgeBlock.lines. */
  lines = -1;
  /** Changes of level that wait to be written together. */
  readonly changeTicks = new Float64Array(BLOCK_ROWS);
  readonly changeLines = new Uint8Array(BLOCK_ROWS);

  constructor(
    private readonly scl: DigitalTap,
    private readonly sda: DigitalTap,
    readonly taps: readonly TapLines[],
    readonly writer: EdgeWriter,
  ) {}

  take(tick: number, cut: boolean): void {
    const lines = SCL_BITS[this.scl.level()] | SDA_BITS[this.sda.level()];
    if (lines !== this.lines || cut) {
      this.writer.put(tick, cut ? lines | CUT : lines);
      this.lines = lines;
    }
    if (this.taps.length > 0) takeTaps(this.taps, tick, cut);
  }

  run(block: RowBlock, from: number, to: number): boolean {
    const { scl, sda, changeTicks, changeLines } = this;
    if (this.taps.length > 0 || scl.direct < 0 || sda.direct < 0) return false;
    const { ticks, readings, width } = block;
    const apart = sda.direct - scl.direct;
    let at = from * width + scl.direct;
    let v = -1;
    let w = -1;
    let { lines } = this;
    let changes = 0;
    for (let i = from; i < to; i += 1, at += width) {
      const x = readings[at];
      const y = readings[at + apart];
      if (x === v && y === w) continue;
      v = x;
      w = y;
      const now = SCL_BITS[x] | SDA_BITS[y];
      if (now === lines) continue;
      lines = now;
      changeTicks[changes] = ticks[i];
      changeLines[changes] = now;
      changes += 1;
    }
    this.put(changes);
    this.lines = lines;
    return true;
  }

  /** Writes the first `count` waiting changes. */
  put(count: number): void {
    if (count > 0) this.writer.putAll(this.changeTicks, this.changeLines, count);
  }

  finish(): void {
    this.writer.finish();
  }

  retract(tick: number): boolean {
    for (const writer of [this.writer, ...this.taps.map((tap) => tap.writer)]) writer.retract(tick);
    this.lines = -1;
    return true;
  }

  orderLost(): boolean {
    const changed = (SCL_BITS[this.scl.level()] | SDA_BITS[this.sda.level()]) ^ this.lines;
    return (changed & (SCL | SCL_UNKNOWN)) !== 0 && (changed & (SDA | SDA_UNKNOWN)) !== 0;
  }
}

/** Bus lines in volts or counts. */
export class VoltTaker implements RowTaker {
  private first = true;

  constructor(
    readonly values: Float64Array,
    readonly sclSlot: number,
    readonly sdaSlot: number,
    readonly scl: Comparator,
    readonly sda: Comparator,
    readonly taps: readonly TapLines[],
    readonly writer: EdgeWriter,
    /** False for counts: means are volts, and counts have none. */
    private readonly means: boolean,
  ) {}

  take(tick: number, cut: boolean): void {
    const v = this.values[this.sclSlot];
    const w = this.values[this.sdaSlot];
    if (!cut && !this.first && this.scl.isQuiet(v) && this.sda.isQuiet(w)) {
      this.scl.quiet(tick, v);
      this.sda.quiet(tick, w);
    } else this.loud(tick, cut, v, w);
    if (this.taps.length > 0) takeTaps(this.taps, tick, cut);
  }

  run(block: RowBlock, from: number, to: number): boolean {
    const { scl, sda, sclSlot, sdaSlot } = this;
    if (this.taps.length > 0 || this.first) return false;
    const { ticks, readings, width } = block;
    for (let i = from; i < to; ) {
      const quiet = sda.quietUntil(block, sdaSlot, i, scl.quietUntil(block, sclSlot, i, to));
      if (quiet > i) {
        scl.quietRun(block, sclSlot, i, quiet);
        sda.quietRun(block, sdaSlot, i, quiet);
      }
      if (quiet < to) this.loud(ticks[quiet], false, readings[quiet * width + sclSlot], readings[quiet * width + sdaSlot]);
      i = quiet + 1;
    }
    return true;
  }

  private loud(tick: number, cut: boolean, v: number, w: number): void {
    if (cut) {
      this.scl.reset();
      this.sda.reset();
    }
    const sclMoved = this.scl.detect(tick, v);
    const sdaMoved = this.sda.detect(tick, w);
    if (this.first || cut) {
      this.put(tick, SCL_BITS[this.scl.level] | SDA_BITS[this.sda.level] | (cut ? CUT : 0), Number.NaN, Number.NaN);
      this.first = false;
    } else if (sclMoved || sdaMoved) this.moved(sclMoved, sdaMoved);
    this.scl.add(v);
    this.sda.add(w);
  }

  /** One or two events since the previous sample, the earlier first. */
  moved(sclMoved: boolean, sdaMoved: boolean): void {
    const { scl, sda } = this;
    const both = SCL_BITS[scl.level] | SDA_BITS[sda.level];
    if (sclMoved && sdaMoved && scl.eventTick !== sda.eventTick) {
      const sclFirst = scl.eventTick < sda.eventTick;
      if (sclFirst) this.put(scl.eventTick, SCL_BITS[scl.level] | this.sdaBefore, scl.lead, 0);
      else this.put(sda.eventTick, this.sclBefore | SDA_BITS[sda.level], 0, sda.lead);
      this.put(sclFirst ? sda.eventTick : scl.eventTick, both, sclFirst ? 0 : scl.lead, sclFirst ? sda.lead : 0);
    } else this.put(sclMoved ? scl.eventTick : sda.eventTick, both, sclMoved ? scl.lead : 0, sdaMoved ? sda.lead : 0);
  }

  private sclBefore = 0;
  private sdaBefore = 0;

  private put(tick: number, lines: number, leadScl: number, leadSda: number): void {
    const meanScl = this.scl.takeMean();
    const meanSda = this.sda.takeMean();
    this.writer.putVolts(tick, lines, leadScl, leadSda, this.means ? meanScl : Number.NaN, this.means ? meanSda : Number.NaN);
    this.sclBefore = lines & (SCL | SCL_UNKNOWN);
    this.sdaBefore = lines & (SDA | SDA_UNKNOWN);
  }

  finish(): void {
    this.writer.finish(this.means ? this.scl.takeMean() : Number.NaN, this.means ? this.sda.takeMean() : Number.NaN);
  }

  /** Samples on both sides of the gap interpolate; only two lines moving at once would lose their order. */
  orderLost(): boolean {
    const moved = (line: Comparator, v: number) => (line.level === 1 ? v < line.vih : line.level === 0 ? v > line.vil : true);
    return moved(this.scl, this.values[this.sclSlot]) && moved(this.sda, this.values[this.sdaSlot]);
  }
}
