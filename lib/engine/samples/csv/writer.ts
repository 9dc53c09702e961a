// In: levels of a pair of lines, instant by instant. Out: EdgeBlocks for the sink. Holds back the newest event, because
// another row may still change lines in the same tick and because an event's means are known only at the next one.

import { CUT, type EdgeBlock, SCL, SCL_UNKNOWN, SDA, SDA_UNKNOWN } from "../edges";

const CAPACITY = 16_384;
export class EdgeWriter {
  sclEdges = 0;
  sdaEdges = 0;
  private readonly ticks = new Float64Array(CAPACITY);
  private readonly lines = new Uint8Array(CAPACITY);
  private readonly volts: Float32Array[] | null;
  private length = 0;
  private held = false;
  private heldTick = 0;
  private heldLines = 0;
  private leadScl = 0;
  private leadSda = 0;
  /** Levels of the newest event that was written, -1 before the first. */
  private written = -1;

  constructor(
    private readonly emit: (block: EdgeBlock) => void,
    withVolts: boolean,
  ) {
    this.volts = withVolts ? [0, 1, 2, 3].map(() => new Float32Array(CAPACITY)) : null;
  }

  /** Ticks never decrease from call to call. */
  put(tick: number, lines: number): void {
    this.putVolts(tick, lines, 0, 0, Number.NaN, Number.NaN);
  }

  /** `meanScl` and `meanSda` belong to the interval that this event ends. */
  putVolts(tick: number, lines: number, leadScl: number, leadSda: number, meanScl: number, meanSda: number): void {
    if (this.held && tick === this.heldTick) {
      this.heldLines = lines | (this.heldLines & CUT);
      if (leadScl !== 0) this.leadScl = leadScl;
      if (leadSda !== 0) this.leadSda = leadSda;
      return;
    }
    if (this.held) this.settle(meanScl, meanSda);
    this.held = true;
    this.heldTick = tick;
    this.heldLines = lines;
    this.leadScl = leadScl;
    this.leadSda = leadSda;
  }

  /** Events without volts, each later than the one before. */
  putAll(eventTicks: Float64Array, eventLines: Uint8Array, count: number): void {
    this.put(eventTicks[0], eventLines[0]);
    if (CAPACITY - this.length < count) this.flush();
    const { ticks, lines } = this;
    let { length, written, sclEdges, sdaEdges, heldTick, heldLines } = this;
    for (let i = 1; i < count; i += 1) {
      if (heldLines !== written) {
        ticks[length] = heldTick;
        lines[length] = heldLines;
        length += 1;
        if (written >= 0) {
          const changed = (heldLines ^ written) & ~((heldLines | written) >> 2);
          sclEdges += changed & SCL;
          sdaEdges += (changed & SDA) >> 1;
        }
        written = heldLines & ~CUT;
      }
      heldTick = eventTicks[i];
      heldLines = eventLines[i];
    }
    this.length = length;
    this.written = written;
    this.sclEdges = sclEdges;
    this.sdaEdges = sdaEdges;
    this.heldTick = heldTick;
    this.heldLines = heldLines;
  }

  /** Takes the event at `tick` back, if there is one. */
  retract(tick: number): void {
    if (this.held && this.heldTick === tick) this.held = false;
  }

  private settle(meanScl: number, meanSda: number): void {
    const lines = this.heldLines;
    if (lines === this.written) return;
    if (this.length === CAPACITY) this.flush();
    const at = this.length;
    this.ticks[at] = this.heldTick;
    this.lines[at] = lines;
    if (this.volts !== null) {
      this.volts[0][at] = this.leadScl;
      this.volts[1][at] = this.leadSda;
      this.volts[2][at] = meanScl;
      this.volts[3][at] = meanSda;
    }
    this.length = at + 1;
    if (this.written >= 0) {
      const changed = lines ^ this.written;
      const unknown = lines | this.written;
      if ((changed & SCL) !== 0 && (unknown & SCL_UNKNOWN) === 0) this.sclEdges += 1;
      if ((changed & SDA) !== 0 && (unknown & SDA_UNKNOWN) === 0) this.sdaEdges += 1;
    }
    this.written = lines & ~CUT;
  }

  /** Hands over what is settled. */
  flush(): void {
    if (this.length === 0) return;
    const n = this.length;
    const volts =
      this.volts === null
        ? null
        : {
            leadScl: this.volts[0].slice(0, n),
            leadSda: this.volts[1].slice(0, n),
            meanScl: this.volts[2].slice(0, n),
            meanSda: this.volts[3].slice(0, n),
          };
    this.length = 0;
    this.emit({ length: n, ticks: this.ticks.slice(0, n), lines: this.lines.slice(0, n), volts });
  }

  finish(meanScl = Number.NaN, meanSda = Number.NaN): void {
    if (this.held) this.settle(meanScl, meanSda);
    this.held = false;
    this.flush();
  }
}
