// In: the present of the bus lines and the taps at the end of each instant. Out: edge blocks for the sink.

import { Excursions } from "./csv/comparator";
import { EdgeWriter } from "./csv/writer";
import { CUT, SCL, SCL_UNKNOWN, SDA, SDA_UNKNOWN } from "./edges";
import type { EdgeSink } from "./reader";
import type { Offer } from "./vcd-channels";
import { HIGH, type InstantListener, RELEASED, type Slot, Slots, UNKNOWN } from "./vcd-slots";
import { Held, type Limits } from "./vcd-volts";

export interface TapLines {
  readonly scl: Offer | null;
  readonly sda: Offer | null;
  /** A 1 drives low: turned round, so that 1 is released. */
  readonly inverted: boolean;
}

export interface BusLines {
  readonly scl: Offer;
  readonly sda: Offer;
  readonly taps: readonly TapLines[];
  /** z on the bus is high: a pull-up exists. */
  readonly pullup: boolean;
  /** Thresholds of a real line. */
  limitsOf(offer: Offer): Limits;
  readonly volts: boolean;
}

const NEITHER = SCL_UNKNOWN | SDA_UNKNOWN;

function bits(scl: number, sda: number): number {
  return (scl === UNKNOWN ? SCL_UNKNOWN : scl === HIGH ? SCL : 0) | (sda === UNKNOWN ? SDA_UNKNOWN : sda === HIGH ? SDA : 0);
}

/** Follows slots 0 (SCL), 1 (SDA), then two a tap; a tap's missing line is never written and stays unknown. */
export class BusFollower implements InstantListener {
  readonly slots: Slots;
  readonly bus: EdgeWriter;
  readonly excursions = new Excursions(true);
  /** Instants at which a bus line stood at z and was taken as high; at which one was unknown. */
  released = 0;
  unknown = 0;
  private readonly taps: readonly EdgeWriter[];
  private readonly held: readonly (Held | null)[];
  private cutNext = false;
  private readonly cutTaps: boolean[];
  private last = -1;

  constructor(
    private readonly lines: BusLines,
    nets: number,
    sink: EdgeSink,
  ) {
    const offers = [lines.scl, lines.sda, ...lines.taps.flatMap((tap) => [tap.scl, tap.sda])];
    const slots = offers.map((offer): Slot => offer ?? { net: nets, bit: 0, real: false });
    this.slots = new Slots(slots, nets + 1, this);
    this.bus = new EdgeWriter((block) => sink.edges(block), lines.volts, sink.passing === true);
    this.taps = lines.taps.map((_, index) => new EdgeWriter((block) => sink.tap(index, block), false));
    this.cutTaps = lines.taps.map(() => false);
    this.held = offers.map((offer, at) => {
      if (!offer?.real) return null;
      const visit = at < 2 && lines.volts ? this.excursions.visitor(at === 0 ? "scl" : "sda") : () => undefined;
      return new Held(lines.limitsOf(offer), visit);
    });
  }

  instant(tick: number, written: Int32Array, count: number): void {
    let bus = false;
    let tap = false;
    let moved = 0;
    for (let k = 0; k < count; k++) {
      const slot = written[k];
      if (slot < 2) bus = true;
      else tap = true;
      const held = this.held[slot];
      if (held?.push(tick, this.slots.volts[slot])) moved |= slot === 0 ? SCL : slot === 1 ? SDA : 0;
    }
    if (bus) this.busInstant(tick, moved);
    if (tap) this.tapInstant(tick);
  }

  cut(): void {
    this.cutNext = true;
    this.cutTaps.fill(true);
  }

  /** Hands on what is complete. */
  flush(): void {
    this.bus.flush();
    for (const tap of this.taps) tap.flush();
  }

  finish(): void {
    if (this.lines.volts) this.bus.finish(this.held[0]?.mean(), this.held[1]?.mean());
    else this.bus.finish();
    for (const tap of this.taps) tap.finish();
  }

  private level(slot: number, pullup: boolean): number {
    const held = this.held[slot];
    if (held) return held.comparator.level;
    const level = this.slots.level[slot];
    if (level !== RELEASED) return level;
    return pullup ? HIGH : UNKNOWN;
  }

  private busInstant(tick: number, moved: number): void {
    const { pullup, volts } = this.lines;
    if (pullup && (this.slots.level[0] === RELEASED || this.slots.level[1] === RELEASED)) this.released++;
    const now = bits(this.level(0, pullup), this.level(1, pullup));
    if ((now & NEITHER) !== 0 && !this.cutNext) this.unknown++;
    const cut = this.cutNext && this.last >= 0 && (now & NEITHER) !== NEITHER;
    if (now === this.last && !cut) return;
    this.last = now;
    if (cut) this.cutNext = false;
    const lines = cut ? now | CUT : now;
    if (!volts) this.bus.put(tick, lines);
    else {
      const [scl, sda] = this.held;
      const leadScl = moved & SCL ? (scl?.comparator.lead ?? 0) : 0;
      const leadSda = moved & SDA ? (sda?.comparator.lead ?? 0) : 0;
      this.bus.putVolts(tick, lines, leadScl, leadSda, scl?.mean() ?? Number.NaN, sda?.mean() ?? Number.NaN);
    }
  }

  private tapInstant(tick: number): void {
    this.taps.forEach((writer, index) => {
      const { inverted } = this.lines.taps[index];
      const turned = (slot: number) => {
        const level = this.level(slot, true);
        // Nobody driving is released, whatever a 1 means.
        const driven = inverted && (this.held[slot] !== null || this.slots.level[slot] !== RELEASED);
        return driven && level !== UNKNOWN ? 1 - level : level;
      };
      const now = bits(turned(2 + 2 * index), turned(3 + 2 * index));
      const cut = this.cutTaps[index] && (now & NEITHER) !== NEITHER;
      if (cut) this.cutTaps[index] = false;
      writer.put(tick, cut ? now | CUT : now);
    });
  }
}
