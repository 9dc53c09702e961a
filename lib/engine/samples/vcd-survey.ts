// In: the first changes of every channel of a VCD. Out: traces for the channel finder.

import type { LineTrace } from "../channels/trace";
import type { Offer } from "./vcd-channels";
import { HIGH, type InstantListener, LOW, RELEASED, type Slot, Slots } from "./vcd-slots";
import { estimate, type Limits, levelsOf } from "./vcd-volts";

/** Changes kept of one line; a line busier than that is followed no further. */
const KEPT = 8192;

interface Track {
  ticks: Float64Array;
  values: Float64Array;
  length: number;
  last: number;
  full: boolean;
}

/** Follows every channel until told to stop. A line released (z) is taken as high. */
export class Survey implements InstantListener {
  readonly slots: Slots;
  private readonly tracks: Track[];
  private readonly slotOf: number[];

  constructor(
    private readonly offers: readonly Offer[],
    nets: number,
  ) {
    const slots: Slot[] = [];
    const known = new Map<string, number>();
    this.slotOf = offers.map((offer) => {
      if (offer.channel.kind === "other") return -1;
      const key = `${offer.net} ${offer.bit} ${offer.real}`;
      const slot = known.get(key) ?? slots.length;
      if (slot === slots.length) slots.push({ net: offer.net, bit: offer.bit, real: offer.real });
      known.set(key, slot);
      return slot;
    });
    this.tracks = slots.map(() => ({
      ticks: new Float64Array(8),
      values: new Float64Array(8),
      length: 0,
      last: Number.NaN,
      full: false,
    }));
    this.slots = new Slots(slots, nets, this);
    this.reals = slots.map((slot) => slot.real);
  }
  private readonly reals: readonly boolean[];

  instant(tick: number, written: Int32Array, count: number): void {
    for (let k = 0; k < count; k++) {
      const slot = written[k];
      const track = this.tracks[slot];
      const value = this.reals[slot] ? this.slots.volts[slot] : this.slots.level[slot];
      if (track.length > 0 && Object.is(value, track.last)) continue;
      if (track.length === KEPT) {
        track.full = true;
        continue;
      }
      if (track.length === track.ticks.length) {
        track.ticks = wider(track.ticks);
        track.values = wider(track.values);
      }
      track.ticks[track.length] = tick;
      track.values[track.length++] = value;
      track.last = value;
    }
  }

  cut(): void {
    // The levels told around the cut say enough.
  }

  /** First instant of a channel, NaN where it never had a value. */
  firstTick(offer: Offer): number {
    const track = this.trackOf(offer);
    return track && track.length > 0 ? track.ticks[0] : Number.NaN;
  }

  /** Thresholds that a real channel's own values suggest. */
  limits(offer: Offer): Limits | null {
    const track = this.trackOf(offer);
    return track ? estimate(track.values.slice(0, track.length)) : null;
  }

  traces(): LineTrace[] {
    const traces: (LineTrace | null)[] = this.tracks.map(() => null);
    const found: LineTrace[] = [];
    this.offers.forEach((offer, at) => {
      const slot = this.slotOf[at];
      if (slot < 0) return;
      const shared = traces[slot] ?? this.trace(slot, offer);
      traces[slot] = shared;
      found.push({ ...shared, id: offer.channel.id, name: offer.channel.name });
    });
    return found;
  }

  private trackOf(offer: Offer): Track | null {
    const slot = this.slotOf[this.offers.indexOf(offer)];
    return slot === undefined || slot < 0 ? null : this.tracks[slot];
  }

  private trace(slot: number, offer: Offer): LineTrace {
    const track = this.tracks[slot];
    const values = track.values.slice(0, track.length);
    const limits = offer.real ? estimate(values) : null;
    const raw = offer.real ? (limits ? levelsOf(values, limits) : new Uint8Array(track.length).fill(2)) : Uint8Array.from(values);
    const ticks: number[] = [];
    const levels: number[] = [];
    let last = -1;
    raw.forEach((value, i) => {
      const level = value === RELEASED || value === HIGH ? 1 : value === LOW ? 0 : 2;
      if (level === last) return;
      last = level;
      ticks.push(track.ticks[i]);
      levels.push(level);
    });
    // The first entry is the initial state, not a change.
    const initial = levels.length > 0 ? (levels[0] as 0 | 1 | 2) : 2;
    return {
      id: "",
      name: "",
      initial,
      length: Math.max(0, ticks.length - 1),
      ticks: Float64Array.from(ticks.slice(1)),
      levels: Uint8Array.from(levels.slice(1)),
      ...(track.full ? { until: track.ticks[track.length - 1] } : {}),
    };
  }
}

function wider(column: Float64Array): Float64Array {
  const next = new Float64Array(column.length * 2);
  next.set(column);
  return next;
}
