// In: supply, sink current, rise-time limit, bus capacitance. Out: the range a pull-up resistor must lie in.
// UM10204 Rev 7 7.1: Rp(max) = tr / (0.8473 Cb), Rp(min) = (VDD - VOL(max)) / IOL; SLVA689 section 4 works the same example.

/** ln(0.7 / 0.3): the 30 % to 70 % rise of an RC line in units of RC. */
export const RISE_PER_RC = Math.log(0.7 / 0.3);
/** The same as UM10204 7.1 and SLVA689 print it; their examples are computed with this. */
const RISE_PER_RC_PRINTED = 0.8473;

/** Largest pull-up, ohm, for a rise of `riseS` seconds on `capacitanceF` farad. */
export function largestPullUp(riseS: number, capacitanceF: number, perRc = RISE_PER_RC_PRINTED): number {
  return riseS / (perRc * capacitanceF);
}

/** Smallest pull-up, ohm, that a driver sinking `sinkA` ampere still pulls down to `lowV`. */
export function smallestPullUp(vdd: number, lowV: number, sinkA: number): number {
  return (vdd - lowV) / sinkA;
}

/** RC of the line, seconds, from its rise; `perRc` says between which points, 30 % and 70 % where nothing is said. */
export function timeConstant(riseS: number, perRc = RISE_PER_RC): number {
  return riseS / perRc;
}

export interface DriveLevel {
  readonly lowV: number;
  readonly sinkA: number;
}

/** The drive that every device of a mode must bring: VOL and IOL of UM10204 Tables 10 and 12, with its 2 V boundary. */
export function driveOf(profile: string, vdd: number): DriveLevel {
  if (profile === "Fast-mode Plus" || profile === "SMBus 3 1 MHz") return { lowV: 0.4, sinkA: 0.02 };
  if (vdd <= 2) return { lowV: 0.2 * vdd, sinkA: 0.002 };
  return { lowV: 0.4, sinkA: 0.003 };
}

export interface PullUpAdvice {
  readonly rpMin_ohm: number;
  /** null where the capacitance is not known. */
  readonly rpMax_ohm: number | null;
  /** False where Rp(min) exceeds Rp(max): no resistor alone fits (UM10204 5.1: current source or switched pull-up). */
  readonly passive: boolean;
  /** Line capacitance that the measured rise implies, where the pull-up's value is known; farad. */
  readonly capacitance_f: number | null;
}

/**
 * Advice for one line. Give either the capacitance or the pull-up's value with the measured rise; times in seconds.
 */
export function advisePullUp(input: {
  readonly profile: string;
  readonly vdd: number;
  readonly riseLimitS: number;
  /** Where the rise time runs between other levels than 30 % and 70 %: its length in units of RC. */
  readonly risePerRc?: number;
  readonly capacitanceF: number | null;
  readonly pullUpOhm: number | null;
  readonly measuredRiseS: number | null;
}): PullUpAdvice {
  const { lowV, sinkA } = driveOf(input.profile, input.vdd);
  const rpMin = smallestPullUp(input.vdd, lowV, sinkA);
  const implied =
    input.pullUpOhm !== null && input.measuredRiseS !== null
      ? timeConstant(input.measuredRiseS, input.risePerRc) / input.pullUpOhm
      : null;
  const capacitance = input.capacitanceF ?? implied;
  const rpMax = capacitance === null ? null : largestPullUp(input.riseLimitS, capacitance, input.risePerRc);
  return { rpMin_ohm: rpMin, rpMax_ohm: rpMax, passive: rpMax === null || rpMin <= rpMax, capacitance_f: capacitance };
}
