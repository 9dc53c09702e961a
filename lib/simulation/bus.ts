// In: a scenario. Out: both waveforms as segments, what each controller drove, and the truth. Event-driven: nothing moves
// between events, times are picoseconds in doubles, equal seeds give equal recordings.

import { Controller } from "./controller";
import { type Appointment, Queue } from "./queue";
import { createRandom, type Random } from "./random";
import type { Scenario, Truth, TruthStretch, TruthTransaction, TruthYield } from "./scenario";
import { Target } from "./target";
import { type Segments, Wire } from "./wire";

const PS = 1e12;
/** Both lines high for this long: a controller may take the bus for free again (SMBus tHIGH:MAX rule; from memory, 50 us, doubled). */
const IDLE_PS = 100e6;

/** What one controller drove: instants at which it began (low true) or ceased to pull. */
export interface Drive {
  readonly at: number[];
  readonly low: boolean[];
}

export interface Recording {
  readonly scl: Segments;
  readonly sda: Segments;
  readonly vdd_v: number;
  /** Per controller, in the scenario's order. */
  readonly drives: readonly { readonly scl: Drive; readonly sda: Drive }[];
  readonly truth: Truth;
  readonly endPs: number;
}

export class Bus {
  now = 0;
  busy = false;
  freeAt = Number.NEGATIVE_INFINITY;
  /** SDA was pulled for a START that SCL has not followed yet. */
  starting = false;
  readonly random: Random;
  readonly scl: Wire;
  readonly sda: Wire;
  readonly drives: { readonly scl: Drive; readonly sda: Drive }[];
  readonly transactions: TruthTransaction[] = [];
  readonly yields: TruthYield[] = [];
  readonly stretches: TruthStretch[] = [];
  private readonly queue = new Queue();
  private readonly controllers: Controller[];
  private readonly targets: Target[];
  private starters: number[] = [];
  private open: TruthTransaction | null = null;
  private lastRise = 0;
  private idle: Appointment | null = null;

  constructor(private readonly scenario: Scenario) {
    this.random = createRandom(scenario.seed);
    const { wire } = scenario;
    const siemens = [...scenario.controllers, ...scenario.targets].map((plan) => 1 / plan.drive_ohm);
    const listener = { level: (line: 0 | 1, level: 0 | 1) => this.level(line, level) };
    const build = (line: 0 | 1, farad: number): Wire =>
      new Wire(line, this.queue, listener, wire.vdd_v, wire.pullup_ohm, farad, wire.filter_s * PS, siemens);
    this.scl = build(0, wire.sclCapacitance_f);
    this.sda = build(1, wire.sdaCapacitance_f);
    this.controllers = scenario.controllers.map((plan, i) => new Controller(i, i, plan, this));
    this.targets = scenario.targets.map((plan, i) => new Target(scenario.controllers.length + i, i, plan, this));
    this.drives = scenario.controllers.map(() => ({ scl: { at: [], low: [] }, sda: { at: [], low: [] } }));
    for (const pulse of scenario.disturbances) {
      const line = pulse.line === "scl" ? this.scl : this.sda;
      this.at(pulse.at_s * PS, () => line.force(pulse.to, this.now));
      this.at((pulse.at_s + pulse.width_s) * PS, () => line.force(null, this.now));
    }
  }

  run(): void {
    const until = this.scenario.until_s * PS;
    for (const controller of this.controllers) controller.consider();
    while (this.queue.peek() <= until) {
      const entry = this.queue.take();
      if (entry?.run == null) continue;
      this.now = entry.at;
      entry.run();
    }
    this.now = until;
  }

  at(time: number, run: () => void): Appointment {
    return this.queue.add(Math.max(time, this.now), run);
  }

  drive(line: "scl" | "sda", device: number, low: boolean): void {
    const wire = line === "scl" ? this.scl : this.sda;
    if (wire.isPulled(device) === low) return;
    if (line === "sda" && low && this.scl.seen === 1 && device < this.controllers.length && !this.busy) this.starting = true;
    wire.drive(device, low, this.now);
    if (device >= this.controllers.length) return;
    const drive = this.drives[device][line];
    drive.at.push(this.now);
    drive.low.push(low);
  }

  /** A controller makes its START. */
  join(controller: number, after: number): void {
    this.starters.push(controller);
    if (after < 0) return;
    // The retry stands in the transaction that this START opens, or has just opened.
    this.yields[after].retry = this.busy ? this.transactions.length - 1 : this.transactions.length;
  }

  lost(controller: number, meant: TruthYield["meant"]): number {
    const bit = Math.max(0, (this.open?.pulses ?? 1) - 1);
    const others = this.controllers.some((other) => other.index !== controller && other.phase === "run");
    this.yields.push({
      controller,
      transaction: this.transactions.length - 1,
      bit_index: bit,
      decided_s: this.lastRise / PS,
      meant,
      retry: null,
      alone: !others,
    });
    return this.yields.length - 1;
  }

  kept(controller: number): void {
    this.transactions.at(-1)?.kept.push(controller);
  }

  /** Place within its byte of the pulse now high, 0 to 8. */
  bitOfByte(): number {
    return Math.max(0, (this.open?.pulses ?? 1) - 1) % 9;
  }

  stretched(target: number, hold: number): void {
    const pulse = this.open?.pulses ?? 0;
    this.stretches.push({ target, transaction: this.transactions.length - 1, pulse, start_s: this.now / PS, hold_s: hold });
  }

  private level(line: 0 | 1, level: 0 | 1): void {
    this.watchIdle();
    if (line === 1) {
      if (this.scl.seen === 1) this.condition(level);
      return;
    }
    if (level === 1) {
      this.lastRise = this.now;
      if (this.open !== null) this.open.pulses++;
    } else this.starting = false;
    for (const target of this.targets) target.onScl(level);
    for (const controller of this.controllers) controller.onScl(level);
  }

  private watchIdle(): void {
    if (this.idle !== null) this.idle.run = null;
    this.idle = null;
    if (!this.busy || this.scl.seen === 0 || this.sda.seen === 0) return;
    this.idle = this.at(this.now + IDLE_PS, () => {
      this.close();
      this.release();
    });
  }

  private release(): void {
    this.open = null;
    this.busy = false;
    this.starters = [];
    this.freeAt = this.now;
    for (const controller of this.controllers) controller.consider();
  }

  private condition(level: 0 | 1): void {
    if (level === 0) {
      if (this.open !== null) this.close();
      const first = !this.busy;
      this.busy = true;
      const running = this.controllers.filter((c) => c.phase === "run" || c.phase === "start").map((c) => c.index);
      this.open = {
        start_s: this.now / PS,
        end_s: this.now / PS,
        pulses: 0,
        controllers: first ? this.starters : running,
        kept: [],
      };
      this.transactions.push(this.open);
      for (const target of this.targets) target.onStart();
      for (const controller of this.controllers) controller.onStart();
      return;
    }
    this.close();
    this.open = null;
    this.busy = false;
    this.freeAt = this.now;
    for (const target of this.targets) target.onStop();
    for (const controller of this.controllers) controller.onStop();
    this.release();
  }

  private close(): void {
    if (this.open === null) return;
    this.open.end_s = this.now / PS;
    // The high in which a STOP or repeated START stands is not a bit.
    this.open.pulses = Math.max(0, this.open.pulses - 1);
  }
}

export function simulate(scenario: Scenario): Recording {
  const bus = new Bus(scenario);
  bus.run();
  return {
    scl: bus.scl.segments,
    sda: bus.sda.segments,
    vdd_v: scenario.wire.vdd_v,
    drives: bus.drives,
    truth: { transactions: bus.transactions, yields: bus.yields, stretches: bus.stretches },
    endPs: bus.now,
  };
}
