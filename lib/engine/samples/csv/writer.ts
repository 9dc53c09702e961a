// In: levels of a pair of lines, instant by instant. Out: EdgeBlocks for the sink. Holds back the newest event, because
// another row may still change lines in the same tick and because an event's means are known only at the next one.

import { CUT, type EdgeBlock, SCL, SCL_UNKNOWN, SDA, SDA_UNKNOWN, type VoltColumns } from "../edges";

const CAPACITY = 16_384;
/** Pages for a passing sink: it looks at the newest block and the one before while the next is written. */
const PAGES = 3;

class Page {
  readonly ticks = new Float64Array(CAPACITY);
  readonly lines = new Uint8Array(CAPACITY);
  readonly volts: VoltColumns | null;

  constructor(withVolts: boolean) {
    const column = () => new Float32Array(CAPACITY);
    this.volts = withVolts ? { leadScl: column(), leadSda: column(), meanScl: column(), meanSda: column() } : null;
  }

  /** The first `n` entries, in memory of their own or in the page's. */
  block(n: number, own: boolean): EdgeBlock {
    const part = <T extends Float64Array | Float32Array | Uint8Array>(column: T) =>
      (own ? column.slice(0, n) : column.subarray(0, n)) as T;
    const { volts } = this;
    return {
      length: n,
      ticks: part(this.ticks),
      lines: part(this.lines),
      volts: volts && {
        leadScl: part(volts.leadScl),
        leadSda: part(volts.leadSda),
        meanScl: part(volts.meanScl),
        meanSda: part(volts.meanSda),
      },
    };
  }
}

export class EdgeWriter {
  sclEdges = 0;
  sdaEdges = 0;
  private readonly pages: Page[];
  private page: Page;
  private length = 0;
  private held = false;
  private heldTick = 0;
  private heldLines = 0;
  private leadScl = 0;
  private leadSda = 0;
  /** Levels of the newest event that was written, -1 before the first. */
  private written = -1;

  /** `passing`: blocks may be written over once two more were handed on. */
  constructor(
    private readonly emit: (block: EdgeBlock) => void,
    withVolts: boolean,
    private readonly passing = false,
  ) {
    this.pages = Array.from({ length: passing ? PAGES : 1 }, () => new Page(withVolts));
    this.page = this.pages[0];
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
    const { ticks, lines } = this.page;
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
    const { ticks, lines: levels, volts } = this.page;
    ticks[at] = this.heldTick;
    levels[at] = lines;
    if (volts !== null) {
      volts.leadScl[at] = this.leadScl;
      volts.leadSda[at] = this.leadSda;
      volts.meanScl[at] = meanScl;
      volts.meanSda[at] = meanSda;
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
    const block = this.page.block(this.length, !this.passing);
    this.length = 0;
    this.page = this.pages[(this.pages.indexOf(this.page) + 1) % this.pages.length];
    this.emit(block);
  }

  finish(meanScl = Number.NaN, meanSda = Number.NaN): void {
    if (this.held) this.settle(meanScl, meanSda);
    this.held = false;
    this.flush();
  }
}
