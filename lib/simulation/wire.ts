// In: who pulls the line low, and when. Out: its voltage as exponential segments, and the level that devices see through
// their input filter. Wired-AND with an RC: parallel pull-downs against one pull-up, so several drivers sink lower than one.
// Levels are seen at 0.7 VDD (rise) and 0.3 VDD (fall), UM10204 table 10 note 1 (Rev 7).

import type { Queue } from "./queue";

/** Voltage from `at` on: v = target + (v0 - target) exp(-(t - at) / tau). Struct of arrays; times in picoseconds. */
export interface Segments {
  readonly at: number[];
  readonly v0: number[];
  readonly target: number[];
  readonly tau: number[];
}

export interface WireListener {
  level(line: 0 | 1, level: 0 | 1): void;
}

export class Wire {
  readonly segments: Segments = { at: [0], v0: [], target: [], tau: [1] };
  /** Level as devices see it, after the filter. */
  seen: 0 | 1 = 1;
  private conductance = 0;
  private readonly pulling: Uint8Array;
  private forced: 0 | 1 | null = null;
  private generation = 0;
  private crossing = Number.NaN;

  constructor(
    private readonly line: 0 | 1,
    private readonly queue: Queue,
    private readonly listener: WireListener,
    private readonly vdd: number,
    private readonly pullup: number,
    private readonly capacitance: number,
    private readonly filter: number,
    private readonly siemens: readonly number[],
  ) {
    this.pulling = new Uint8Array(siemens.length);
    this.segments.v0.push(vdd);
    this.segments.target.push(vdd);
  }

  isPulled(device: number): boolean {
    return this.pulling[device] === 1;
  }

  /** Device `device` pulls the line low, or lets go of it. */
  drive(device: number, low: boolean, now: number): void {
    if ((this.pulling[device] === 1) === low) return;
    this.pulling[device] = low ? 1 : 0;
    this.conductance = 0;
    for (let i = 0; i < this.pulling.length; i++) if (this.pulling[i] === 1) this.conductance += this.siemens[i];
    this.change(now);
  }

  /** Something outside the bus holds the line at a level (null: lets go). */
  force(level: 0 | 1 | null, now: number): void {
    this.forced = level;
    this.change(now);
  }

  voltage(now: number): number {
    const s = this.segments;
    const i = s.at.length - 1;
    return s.target[i] + (s.v0[i] - s.target[i]) * Math.exp(-(now - s.at[i]) / s.tau[i]);
  }

  private change(now: number): void {
    const v = this.voltage(now);
    const up = 1 / this.pullup;
    const sum = up + this.conductance;
    let target = (this.vdd * up) / sum;
    let tau = (this.capacitance / sum) * 1e12;
    if (this.forced !== null) {
      target = this.forced === 1 ? this.vdd : 0;
      tau = this.capacitance * 25 * 1e12;
    }
    tau = Math.max(tau, 1);
    const s = this.segments;
    s.at.push(now);
    s.v0.push(v);
    s.target.push(target);
    s.tau.push(tau);
    this.await(now, v, target, tau);
  }

  private await(now: number, v: number, target: number, tau: number): void {
    const generation = ++this.generation;
    const threshold = (this.seen === 1 ? 0.3 : 0.7) * this.vdd;
    const leaves = this.seen === 1 ? target < threshold : target > threshold;
    if (!leaves) {
      this.crossing = Number.NaN;
      return;
    }
    const already = this.seen === 1 ? v <= threshold : v >= threshold;
    if (!already) this.crossing = now + tau * Math.log((v - target) / (threshold - target));
    else if (!(this.crossing <= now)) this.crossing = now;
    this.queue.add(this.crossing + this.filter, () => {
      if (generation !== this.generation) return;
      this.crossing = Number.NaN;
      this.seen = this.seen === 1 ? 0 : 1;
      this.listener.level(this.line, this.seen);
    });
  }
}
