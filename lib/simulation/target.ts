// In: the levels one target sees. Out: what it drives: acknowledges, read data, stretches, and its faults.

import type { Bus } from "./bus";
import type { StretchRule, TargetPlan } from "./scenario";

const PS = 1e12;
type State = "deaf" | "address" | "receive" | "send";

export class Target {
  private state: State = "deaf";
  private bits = 0;
  private shift = 0;
  private byte = 0;
  private sent = 0;
  private out = 0xff;
  private acking = false;
  private lateBy = 0;
  private answered = true;

  constructor(
    readonly device: number,
    private readonly index: number,
    private readonly plan: TargetPlan,
    private readonly bus: Bus,
  ) {}

  onStart(): void {
    this.bus.drive("sda", this.device, false);
    this.state = "address";
    this.bits = -1;
    this.shift = 0;
    this.byte = 0;
    this.acking = false;
    this.lateBy = 0;
  }

  onStop(): void {
    this.state = "deaf";
    this.bus.drive("sda", this.device, false);
  }

  onScl(level: 0 | 1): void {
    if (this.state === "deaf") return;
    if (level === 1) this.rise();
    else this.fall();
  }

  private rise(): void {
    if (this.bits < 0) return;
    const sda = this.bus.sda.seen;
    if (this.bits < 8) {
      this.shift = ((this.shift << 1) | sda) & 0xff;
      const mine = (this.out >> (7 - this.bits)) & 1;
      if (this.state === "send" && this.plan.arbitrates && mine === 1 && sda === 0) this.leave();
    } else if (this.state === "send") {
      this.answered = sda === 0;
    }
    this.bits++;
  }

  private leave(): void {
    this.state = "deaf";
    this.bus.drive("sda", this.device, false);
  }

  private fall(): void {
    if (this.bits < 0) {
      this.bits = 0;
      this.hold();
      return;
    }
    if (this.lateBy > 0) {
      this.lateBy = 0;
      this.put(this.acking, this.plan.ackDelay_s);
      if (!this.acking) this.acking = false;
    }
    if (this.bits === 8) this.acknowledge();
    else if (this.bits >= 9) this.nextByte();
    else if (this.state === "send") this.sendBit();
    if (this.state !== "deaf") this.hold();
  }

  private put(low: boolean, delay: number): void {
    this.bus.at(this.bus.now + delay * PS, () => this.bus.drive("sda", this.device, low));
  }

  private acknowledge(): void {
    if (this.state === "send") {
      this.put(false, this.plan.dataDelay_s);
      return;
    }
    if (this.state === "address") {
      const forMe = this.shift >> 1 === this.plan.address && !this.bus.random.chance(this.plan.refuse);
      if (!forMe) {
        this.leave();
        return;
      }
    }
    this.acking = true;
    if (this.bus.random.chance(this.plan.lateAck)) this.lateBy = 1;
    else this.put(true, this.plan.ackDelay_s);
  }

  private nextByte(): void {
    const late = this.acking && this.bus.random.chance(this.plan.lateRelease);
    if (this.state === "send" && !this.answered) {
      this.leave();
      return;
    }
    if (this.state === "address") this.state = (this.shift & 1) === 1 ? "send" : "receive";
    this.bits = 0;
    this.shift = 0;
    this.byte++;
    this.acking = false;
    if (this.state === "send") {
      this.out = this.plan.data.length > 0 ? this.plan.data[this.sent++ % this.plan.data.length] : 0xff;
      this.sendBit();
    } else if (late) this.lateBy = 1;
    else this.put(false, this.plan.releaseDelay_s);
  }

  private sendBit(): void {
    this.put(((this.out >> (7 - this.bits)) & 1) === 0, this.plan.dataDelay_s);
  }

  private hold(): void {
    for (const rule of this.plan.stretch) {
      if (!this.applies(rule) || !this.bus.random.chance(rule.chance)) continue;
      const hold = this.bus.random.range(rule.hold_s[0], rule.hold_s[1]);
      this.bus.drive("scl", this.device, true);
      this.bus.at(this.bus.now + hold * PS, () => this.bus.drive("scl", this.device, false));
      this.bus.stretched(this.index, hold);
      return;
    }
  }

  private applies(rule: StretchRule): boolean {
    if (rule.byte !== null && rule.byte !== this.byte) return false;
    if (rule.where === "always") return true;
    if (this.state === "address" && this.bits < 8) return false;
    if (rule.where === "every") return true;
    if (rule.where === "ninth") return this.bits === 8;
    if (rule.where === "after-ack") return this.bits === 0 && this.byte > 0;
    return this.bits === rule.bit;
  }
}
