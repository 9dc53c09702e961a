// In: nothing. Out: the description of a simulated bus: wires, controllers, targets, disturbances, and the truth that a
// simulation returns beside the waveforms. All times in seconds, voltages in volts.

/** Clock and data habit of one controller, as it counts them itself (from the edge it sees to the edge it makes). */
export interface Habit {
  readonly tlow_s: number;
  readonly thigh_s: number;
  readonly hdsta_s: number;
  readonly susta_s: number;
  readonly susto_s: number;
  /** How long it waits after a STOP before its own START. */
  readonly buf_s: number;
  /** SCL fall seen to SDA driven low, and to SDA released. */
  readonly dataFall_s: number;
  readonly dataRise_s: number;
  /** SCL rise seen to the instant at which it reads SDA. */
  readonly sample_s: number;
  /** Added to the low before each byte after the first: a controller that fetches its next byte late. */
  readonly pause_s: number;
  /** Spread of `pause_s`, uniform. */
  readonly pauseSpread_s: number;
  /** Standard deviation of every timer. */
  readonly jitter_s: number;
}

/** One START or repeated START of a message. `bytes` for a write, `count` for a read. `addressBytes` as sent, R/W included. */
export interface Segment {
  readonly addressBytes: readonly number[];
  readonly bytes: readonly number[];
  readonly count: number;
}

export interface Job {
  readonly at_s: number;
  readonly message: readonly Segment[];
  /** The controller falls silent after this many SCL pulses (reset in mid-transfer); null: never. */
  readonly resetAfter: number | null;
}

export interface RetryRule {
  /** Wait before the next try, uniform between the two, counted from the loss. */
  readonly after_s: readonly [number, number];
  readonly limit: number;
}

/** leave: lets go at once. byte: clocks to the eighth pulse. byte-ack: clocks through the ninth. UM10204 3.1.8 allows all. */
export type AfterLoss = "leave" | "byte" | "byte-ack";

export interface ControllerPlan {
  readonly label: string;
  readonly habit: Habit;
  /** Output resistance plus series resistor, ohm. */
  readonly drive_ohm: number;
  /** A START decided on less than this before another's START is still made, and merges with it. */
  readonly commit_s: number;
  readonly afterLoss: AfterLoss;
  readonly retryLoss: RetryRule | null;
  readonly retryNack: RetryRule | null;
  readonly jobs: readonly Job[];
}

export interface StretchRule {
  /**
   * ninth: before the acknowledge pulse; after-ack: before the first bit of the next byte; bit: before bit `bit`; every: each low
   * once it is addressed; always: each low of every message, whoever is addressed.
   */
  readonly where: "ninth" | "after-ack" | "bit" | "every" | "always";
  readonly bit: number;
  /** Only in this byte (0 = address byte), or any when null. */
  readonly byte: number | null;
  /** Total hold from the SCL fall, uniform. */
  readonly hold_s: readonly [number, number];
  readonly chance: number;
}

export interface TargetPlan {
  readonly label: string;
  /** First address byte without R/W: 7-bit address. */
  readonly address: number;
  readonly drive_ohm: number;
  readonly ackDelay_s: number;
  readonly releaseDelay_s: number;
  readonly dataDelay_s: number;
  readonly stretch: readonly StretchRule[];
  /** What it answers to reads, repeated. */
  readonly data: readonly number[];
  /** Chance to refuse its address (busy). */
  readonly refuse: number;
  /** Chance per byte to acknowledge one pulse late, or to let go of an acknowledge one pulse late. */
  readonly lateAck: number;
  readonly lateRelease: number;
  /** Gives up when it sends 1 and sees 0 (SMBus alert response and ARP). */
  readonly arbitrates: boolean;
}

export interface WirePlan {
  readonly vdd_v: number;
  readonly pullup_ohm: number;
  readonly sclCapacitance_f: number;
  readonly sdaCapacitance_f: number;
  /** Input filter of every device. */
  readonly filter_s: number;
}

/** A pulse that no device drives. Reaches the devices when wider than their filter. */
export interface Disturbance {
  readonly line: "scl" | "sda";
  readonly at_s: number;
  readonly width_s: number;
  readonly to: 0 | 1;
}

export interface Scenario {
  readonly seed: number;
  readonly wire: WirePlan;
  readonly controllers: readonly ControllerPlan[];
  readonly targets: readonly TargetPlan[];
  readonly disturbances: readonly Disturbance[];
  readonly until_s: number;
}

/** One controller giving way. `bit_index` counts SCL pulses from the START or repeated START of its transaction, from 0. */
export interface TruthYield {
  readonly controller: number;
  readonly transaction: number;
  readonly bit_index: number;
  readonly decided_s: number;
  /** What it had meant to send there: a data 1, a repeated START or a STOP. */
  readonly meant: "bit" | "repeated-start" | "stop";
  /** Transaction in which it tried again; null when it did not. */
  retry: number | null;
  /** No other controller was driving: a look-alike. */
  readonly alone: boolean;
}

export interface TruthTransaction {
  readonly start_s: number;
  end_s: number;
  pulses: number;
  /** Controllers that drove from its START on. */
  readonly controllers: number[];
  /** Who made the STOP or the repeated START that ended it. More than one: a tie. */
  readonly kept: number[];
}

export interface TruthStretch {
  readonly target: number;
  readonly transaction: number;
  /** SCL pulse that the held low precedes, counted from START. */
  readonly pulse: number;
  readonly start_s: number;
  readonly hold_s: number;
}

export interface Truth {
  readonly transactions: readonly TruthTransaction[];
  readonly yields: readonly TruthYield[];
  readonly stretches: readonly TruthStretch[];
}
