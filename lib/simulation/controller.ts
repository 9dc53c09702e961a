// In: the levels one controller sees. Out: what it drives. Bit-level state machine of UM10204 3.1.1 - 3.1.8: clock
// synchronisation by starting its own LOW at every SCL fall and its own HIGH at every SCL rise it sees; arbitration by
// reading SDA back at each bit it drives.

import type { Bus } from "./bus";
import type { Appointment } from "./queue";
import type { ControllerPlan, Habit, Job } from "./scenario";
import { type Step, scriptOf } from "./script";

const PS = 1e12;

interface Task {
  readonly job: Job;
  readonly at: number;
  readonly tries: number;
  /** The loss this is a retry of, index into the truth's yields; -1 for none. */
  readonly after: number;
}

type Phase = "free" | "committed" | "start" | "run" | "passive" | "clear";

export class Controller {
  phase: Phase = "free";
  private tasks: Task[];
  private task: Task | null = null;
  private steps: Step[] = [];
  private step = -1;
  private pulses = 0;
  private passiveLeft = 0;
  private timers: Appointment[] = [];
  private wake: Appointment | null = null;
  private stopping = false;
  private readonly habit: Habit;

  constructor(
    readonly device: number,
    readonly index: number,
    private readonly plan: ControllerPlan,
    private readonly bus: Bus,
  ) {
    this.habit = plan.habit;
    this.tasks = plan.jobs.map((job) => ({ job, at: job.at_s * PS, tries: 0, after: -1 }));
  }

  /** Looks for work; called at the beginning and after every STOP. */
  consider(): void {
    if (this.phase !== "free" || this.tasks.length === 0) return;
    const next = this.tasks[0];
    if (next.job.message.length === 0) {
      this.scheduleClear(next.at);
      return;
    }
    if (this.bus.busy) return;
    const free = this.bus.freeAt + this.time(this.habit.buf_s);
    const at = Math.max(next.at, free, this.bus.now);
    const commit = Math.max(at - this.plan.commit_s * PS, this.bus.now);
    if (this.wake !== null) this.wake.run = null;
    this.wake = this.bus.at(commit, () => {
      if (this.phase !== "free" || this.bus.busy) return;
      this.phase = "committed";
      this.wake = this.bus.at(at, () => this.begin());
    });
  }

  onScl(level: 0 | 1): void {
    if (level === 0) this.fall();
    else this.rise();
  }

  onStart(): void {
    if (this.phase !== "run") return;
    if (this.steps[this.step]?.kind !== "repeat") this.abandon();
    else if (!this.bus.sda.isPulled(this.device)) {
      // Another made the repeated START that this one was about to make: they merge, as at the first START.
      this.clear();
      this.repeated();
    }
  }

  onStop(): void {
    if (this.phase === "run" && this.stopping) this.finish();
    else if (this.phase === "run" || this.phase === "start" || this.phase === "passive") this.abandon();
    this.consider();
  }

  private time(seconds: number): number {
    return Math.max(0, (seconds + this.habit.jitter_s * this.bus.random.gauss()) * PS);
  }

  private after(seconds: number, run: () => void): void {
    this.timers.push(this.bus.at(this.bus.now + this.time(seconds), run));
  }

  private clear(): void {
    for (const timer of this.timers) timer.run = null;
    this.timers.length = 0;
  }

  private begin(): void {
    const bus = this.bus;
    const heldLow = bus.scl.seen === 0 || (bus.sda.seen === 0 && !bus.starting);
    if (heldLow) {
      this.phase = "free";
      if (!bus.busy) this.tasks.shift();
      return;
    }
    this.task = this.tasks.shift() ?? null;
    if (this.task === null) {
      this.phase = "free";
      return;
    }
    this.phase = "start";
    this.steps = scriptOf(this.task.job.message);
    this.step = -1;
    this.pulses = 0;
    this.stopping = false;
    bus.join(this.index, this.task.after);
    bus.drive("sda", this.device, true);
    this.after(this.habit.hdsta_s, () => bus.drive("scl", this.device, true));
  }

  /** Bus clear, UM10204 3.1.16: nine pulses, then a STOP. Asks nobody whether the bus is free. */
  private scheduleClear(at: number): void {
    if (this.wake !== null) this.wake.run = null;
    this.wake = this.bus.at(at, () => {
      this.tasks.shift();
      this.phase = "clear";
      this.clearPulse(9);
    });
  }

  private clearPulse(left: number): void {
    const { bus, device, habit } = this;
    bus.drive("scl", device, true);
    if (left === 0) this.after(habit.dataFall_s, () => bus.drive("sda", device, true));
    this.after(habit.tlow_s, () => {
      bus.drive("scl", device, false);
      if (left > 0) this.after(habit.thigh_s, () => this.clearPulse(left - 1));
      else
        this.after(habit.susto_s, () => {
          this.phase = "free";
          bus.drive("sda", device, false);
        });
    });
  }

  private fall(): void {
    if (this.phase === "committed") {
      // Somebody else's START ran ahead; the bus is busy.
      if (this.wake !== null) this.wake.run = null;
      this.phase = "free";
      return;
    }
    if (this.phase === "free" || this.phase === "clear") return;
    this.clear();
    if (this.phase === "passive") {
      this.passiveLeft--;
      if (this.passiveLeft < 0) {
        this.release();
        return;
      }
      this.low(0);
      return;
    }
    if (this.stopping && this.steps[this.step]?.kind === "stop") {
      // Somebody clocked on where this one meant to stop.
      this.lose("stop");
      return;
    }
    if (this.steps[this.step]?.kind === "repeat" && !this.bus.sda.isPulled(this.device)) {
      // Likewise where it was about to make its repeated START.
      this.lose("repeated-start");
      return;
    }
    if (this.task?.job.resetAfter !== null && this.pulses >= (this.task?.job.resetAfter ?? 0)) {
      this.abandon();
      return;
    }
    this.phase = "run";
    this.step++;
    const step = this.steps[this.step];
    this.low("first" in step && step.first ? this.habit.pause_s + this.habit.pauseSpread_s * this.bus.random.next() : 0);
    this.place(step);
  }

  private low(pause: number): void {
    this.bus.drive("scl", this.device, true);
    this.after(this.habit.tlow_s + pause, () => this.bus.drive("scl", this.device, false));
  }

  /** Puts this step's value on SDA after the data delay. */
  private place(step: Step): void {
    const low = step.kind === "stop" || (step.kind === "own" && step.value === 0);
    const delay = low ? this.habit.dataFall_s : this.habit.dataRise_s;
    this.after(delay, () => this.bus.drive("sda", this.device, low));
  }

  private rise(): void {
    if (this.phase !== "run" && this.phase !== "passive") return;
    this.clear();
    if (this.phase === "passive") {
      this.after(this.habit.thigh_s, () => this.bus.drive("scl", this.device, true));
      return;
    }
    const step = this.steps[this.step];
    if (step.kind === "repeat") {
      this.after(this.habit.susta_s, () => this.repeat());
    } else if (step.kind === "stop") {
      this.stopping = true;
      this.after(this.habit.susto_s, () => this.bus.drive("sda", this.device, false));
    } else {
      this.pulses++;
      this.after(this.habit.sample_s, () => this.check(step));
      this.after(this.habit.thigh_s, () => this.bus.drive("scl", this.device, true));
    }
  }

  private repeat(): void {
    if (this.bus.sda.seen === 0) {
      this.lose("repeated-start");
      return;
    }
    this.repeated();
  }

  private repeated(): void {
    this.bus.drive("sda", this.device, true);
    this.after(this.habit.hdsta_s, () => this.bus.drive("scl", this.device, true));
  }

  private check(step: Step): void {
    const sda = this.bus.sda.seen;
    if (step.kind === "own" && step.value === 1 && sda === 0) this.lose("bit");
    else if (step.kind === "theirs" && step.ack && sda === 1) this.refused();
  }

  /** NACK: the rest of the message is dropped and a STOP follows. */
  private refused(): void {
    this.steps = [...this.steps.slice(0, this.step + 1), { kind: "stop" }];
    const rule = this.plan.retryNack;
    if (rule !== null && this.task !== null && this.task.tries < rule.limit) this.again(rule.after_s, -1);
  }

  private again(after: readonly [number, number], loss: number): void {
    if (this.task === null) return;
    const at = this.bus.now + this.bus.random.range(after[0], after[1]) * PS;
    this.tasks.unshift({ job: this.task.job, at, tries: this.task.tries + 1, after: loss });
  }

  private lose(meant: "bit" | "repeated-start" | "stop"): void {
    const loss = this.bus.lost(this.index, meant);
    const rule = this.plan.retryLoss;
    if (rule !== null && this.task !== null && this.task.tries < rule.limit) this.again(rule.after_s, loss);
    this.bus.drive("sda", this.device, false);
    const ends = this.plan.afterLoss === "byte" ? 8 : 9;
    this.passiveLeft = meant === "bit" && this.plan.afterLoss !== "leave" ? ends - 1 - this.bus.bitOfByte() : 0;
    if (this.passiveLeft > 0) {
      // Keeps its running HIGH timer: it still ends this pulse if it is the quicker one.
      this.phase = "passive";
      return;
    }
    this.release();
  }

  private release(): void {
    this.clear();
    this.task = null;
    this.phase = "free";
    this.bus.drive("sda", this.device, false);
    this.bus.drive("scl", this.device, false);
  }

  private abandon(): void {
    this.release();
  }

  private finish(): void {
    this.bus.kept(this.index);
    this.release();
  }
}
