// In: the first changes of every channel of a VCD. Out: traces for the channel finder.

import type { LineTrace } from "../channels/trace";
import type { Offer } from "./vcd-channels";
import { HIGH, type InstantListener, LOW, RELEASED, type Slot, Slots } from "./vcd-slots";
import { estimate, type Limits, levelsOf } from "./vcd-volts";

/** Changes kept of one line; a line busier than that is followed no further. */
const KEPT = 8192;

/** A line that has changed; one that has only its first value needs none. */
interface Track {
  ticks: Float64Array;
  /** Levels of a digital line, volts of a real one. */
  values: Uint8Array | Float64Array;
  length: number;
  full: boolean;
}

const FIRST = 32;

/** Follows every channel until told to stop. A line released (z) is taken as high. */
export class Survey implements InstantListener {
  readonly slots: Slots;
  private readonly tracks: (Track | null)[];
  /** First instant (NaN: none yet) and latest value of each slot. */
  private readonly first: Float64Array;
  private readonly last: Float64Array;
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
    this.tracks = slots.map(() => null);
    this.first = new Float64Array(slots.length).fill(Number.NaN);
    this.last = new Float64Array(slots.length).fill(Number.NaN);
    this.slots = new Slots(slots, nets, this);
    this.reals = slots.map((slot) => slot.real);
  }
  private readonly reals: readonly boolean[];

  instant(tick: number, written: Int32Array, count: number): void {
    for (let k = 0; k < count; k++) {
      const slot = written[k];
      const value = this.reals[slot] ? this.slots.volts[slot] : this.slots.level[slot];
      if (Number.isNaN(this.first[slot])) {
        this.first[slot] = tick;
        this.last[slot] = value;
      } else if (!Object.is(value, this.last[slot])) this.change(slot, tick, value);
    }
  }

  private change(slot: number, tick: number, value: number): void {
    const track = this.tracks[slot] ?? this.begin(slot);
    if (track.length === KEPT) {
      track.full = true;
      return;
    }
    if (track.length === track.ticks.length) grow(track);
    track.ticks[track.length] = tick;
    track.values[track.length++] = value;
    this.last[slot] = value;
  }

  /** A track that holds the first value. */
  private begin(slot: number): Track {
    const values = this.reals[slot] ? new Float64Array(FIRST) : new Uint8Array(FIRST);
    const track: Track = { ticks: new Float64Array(FIRST), values, length: 0, full: false };
    this.tracks[slot] = track;
    if (!Number.isNaN(this.first[slot])) {
      track.ticks[0] = this.first[slot];
      track.values[0] = this.last[slot];
      track.length = 1;
    }
    return track;
  }

  cut(): void {
    // The levels told around the cut say enough.
  }

  /** First instant of a channel, NaN where it never had a value. */
  firstTick(offer: Offer): number {
    const slot = this.slotOf[this.offers.indexOf(offer)];
    return slot === undefined || slot < 0 ? Number.NaN : this.first[slot];
  }

  /** Thresholds that a real channel's own values suggest. */
  limits(offer: Offer): Limits | null {
    const track = this.trackOf(offer);
    return track?.values instanceof Float64Array ? estimate(track.values.slice(0, track.length)) : null;
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
    if (track === null) return { ...FLAT, initial: offer.real ? 2 : levelOf(this.last[slot]) };
    const limits = offer.real ? this.limits(offer) : null;
    const raw = track.values instanceof Float64Array ? levelsOf(track.values.subarray(0, track.length), limits) : track.values;
    const ticks = new Float64Array(track.length);
    const levels = new Uint8Array(track.length);
    let length = 0;
    for (let i = 0; i < track.length; i++) {
      const level = levelOf(raw[i]);
      if (length > 0 && level === levels[length - 1]) continue;
      ticks[length] = track.ticks[i];
      levels[length++] = level;
    }
    // The first entry is the initial state, not a change.
    const initial = length === 0 ? 2 : levelOf(levels[0]);
    return {
      id: "",
      name: "",
      initial,
      length: Math.max(0, length - 1),
      ticks: ticks.subarray(1, Math.max(1, length)),
      levels: levels.subarray(1, Math.max(1, length)),
      ...(track.full ? { until: track.ticks[track.length - 1] } : {}),
    };
  }
}

const FLAT = { id: "", name: "", length: 0, ticks: new Float64Array(0), levels: new Uint8Array(0) };

/** z is high for the finder's purpose; NaN, before the first value, is unknown. */
function levelOf(level: number): 0 | 1 | 2 {
  return level === RELEASED || level === HIGH ? 1 : level === LOW ? 0 : 2;
}

function grow(track: Track): void {
  const ticks = new Float64Array(track.length * 4);
  ticks.set(track.ticks);
  const values = track.values instanceof Uint8Array ? new Uint8Array(ticks.length) : new Float64Array(ticks.length);
  values.set(track.values);
  track.ticks = ticks;
  track.values = values;
}
