// In: nothing. Out: the decode report as a zod schema: a public interface, versioned, changed only by adding fields.
// README.md documents it; the command line, the stations' API and "download report" all print exactly this.

import { z } from "zod";

export const REPORT_SCHEMA = "firstlow.report/1";

const warning = z.object({ code: z.string(), message: z.string(), line: z.int().optional(), count: z.int().optional() });

export const CaptureSchema = z.object({
  format: z.enum(["csv", "vcd"]),
  levels: z.enum(["digital", "volts"]),
  start_s: z.number(),
  duration_s: z.number(),
  samples: z.int(),
  edges: z.object({ scl: z.int(), sda: z.int() }),
  sample_interval_s: z.number().nullable(),
  channels: z.array(z.string()),
  scl: z.string(),
  sda: z.string(),
  taps: z.array(z.object({ label: z.string(), scl: z.string().nullable(), sda: z.string().nullable() })),
  vdd_v: z.number().nullable(),
  vil_v: z.number().nullable(),
  vih_v: z.number().nullable(),
  time_base: z.enum(["file", "given", "assumed"]),
  warnings: z.array(warning),
});

export const TransactionSchema = z.object({
  index: z.int(),
  start_s: z.number(),
  end_s: z.number(),
  opens: z.enum(["S", "Sr"]),
  closes: z.enum(["P", "Sr", "none"]),
  address_bytes: z.array(z.object({ value: z.int(), ack: z.boolean() })),
  address: z.int().nullable(),
  address_bits: z.union([z.literal(7), z.literal(10)]).nullable(),
  direction: z.enum(["W", "R"]).nullable(),
  kind: z.enum(["normal", "general-call", "start-byte", "hs-controller-code", "device-id", "reserved", "bus-clear", "broken"]),
  address_ack: z.boolean().nullable(),
  bytes: z.array(z.object({ value: z.int(), ack: z.boolean().nullable(), start_s: z.number(), bits: z.int() })),
  controller: z.string().nullable(),
});

export const StretchSchema = z.object({
  transaction: z.int(),
  byte: z.int(),
  bit: z.int(),
  start_s: z.number(),
  low_s: z.number(),
  excess_s: z.number(),
  by: z.enum(["target", "controller", "unknown"]),
  /** Length of the first SCL high after it, where that is shorter than tHIGH allows. */
  runt_s: z.number().optional(),
});

export const EvidenceSchema = z.object({
  kind: z.enum(["drive-tap", "low-level", "clock-sync", "start", "data-timing", "retry", "log"]),
  bits: z.number(),
  detail: z.string(),
});

export const ContestSchema = z.object({
  transaction: z.int(),
  start_s: z.number(),
  decided_s: z.number(),
  byte: z.int(),
  bit: z.int(),
  bit_index: z.int(),
  kept: z.string().nullable(),
  yielded: z.string().nullable(),
  retry: z.int().nullable(),
  probability: z.number(),
  grade: z.enum(["certain", "strong", "probable", "weak"]),
  evidence: z.array(EvidenceSchema),
  look_alikes: z.array(z.object({ kind: z.string(), probability: z.number(), detail: z.string() })),
});

/** Targets that answer one read at once (SMBus alert response, ARP). `kept` and `yielded` are 7-bit addresses where they are told. */
export const TargetContestSchema = ContestSchema.pick({
  transaction: true,
  start_s: true,
  byte: true,
  bit: true,
  bit_index: true,
  retry: true,
  probability: true,
  grade: true,
}).extend({ kept: z.int().nullable(), yielded: z.int().nullable(), detail: z.string() });

/** A contest that these two would leave no trace of on these lines: together they look like the one that keeps the bus. */
export const BlindPairSchema = z.object({ kept: z.string(), yielded: z.string() });

export const FAULT_KINDS = [
  "address-nack",
  "data-nack",
  "missing-stop",
  "misplaced-start",
  "misplaced-stop",
  "short-byte",
  "void-message",
  "spike",
  "sda-change-while-high",
  "scl-stuck-low",
  "sda-stuck-low",
  "bus-clear",
  "phantom-start",
  "reserved-address",
  "pec-mismatch",
  "smbus-timeout",
  "low-swing",
  "slow-rise",
  "between-thresholds",
  "address-collision",
  "suspected-collision",
  "runt-after-stretch",
  "bit-slip",
  "look-alike",
] as const;

export const FaultSchema = z.object({
  kind: z.enum(FAULT_KINDS),
  transaction: z.int().nullable(),
  time_s: z.number(),
  detail: z.string(),
});

export const HARMLESS_KINDS = ["read-end-nack", "ack-handover", "low-pulse", "crosstalk-dip"] as const;

/** What looks like a fault and is none: every occurrence is counted, the first hundred are listed. */
export const HarmlessSchema = z.object({
  kind: z.enum(HARMLESS_KINDS),
  count: z.int(),
  places: z.array(z.object({ transaction: z.int().nullable(), time_s: z.number() })),
});

const occurrence = z.object({ transaction: z.int().nullable(), time_s: z.number(), measured_s: z.number() });

/** A frequency is given as its period. A parameter stands twice where a capture holds Hs traffic as well: see `traffic`. */
export const MeasurementSchema = z.object({
  parameter: z.string(),
  count: z.int(),
  min_s: z.number().nullable(),
  p50_s: z.number().nullable(),
  max_s: z.number().nullable(),
  limit_min_s: z.number().nullable(),
  limit_max_s: z.number().nullable(),
  below: z.int(),
  above: z.int(),
  uncertain: z.int(),
  traffic: z.enum(["F/S", "Hs"]).optional(),
  p1_s: z.number().nullable().optional(),
  p99_s: z.number().nullable().optional(),
  verdict: z.enum(["pass", "fail", "too-close", "not-measurable", "not-seen", "no-limit"]).optional(),
  /** Passes that a one-threshold capture cannot prove: nearer to the least value than `bias_s`. */
  unproven: z.int().optional(),
  /** Of one interval; 0 where times are exact to their own step. */
  uncertainty_s: z.number().optional(),
  /** The most by which one threshold over-reports it on edges that the profile allows; 0 in volts. */
  bias_s: z.number().optional(),
  /** From where to where it is measured. */
  points: z.string().optional(),
  /** Document, revision and table of the limit. */
  clause: z.string().optional(),
  note: z.string().optional(),
  /** Samples per second that would judge the limit within a tenth, where this capture is too slow for it. */
  needs_rate: z.number().nullable().optional(),
  smallest: occurrence.nullable().optional(),
  largest: occurrence.nullable().optional(),
  /** Pairs: intervals from this length on, and how many, in steps of 1/8 octave. */
  distribution: z.array(z.tuple([z.number(), z.int()])).optional(),
});

export const ViolationSchema = z.object({
  parameter: z.string(),
  transaction: z.int().nullable(),
  time_s: z.number(),
  measured_s: z.number(),
  limit_s: z.number(),
  side: z.enum(["min", "max"]),
});

export const ControllerSchema = z.object({
  id: z.string(),
  name: z.string().nullable(),
  tlow_s: z.number().nullable(),
  thigh_s: z.number().nullable(),
  vol_v: z.number().nullable(),
  transactions: z.int(),
});

const level = z.object({ count: z.int(), min_v: z.number(), p50_v: z.number(), max_v: z.number() }).nullable();

/** Volts only. */
export const LevelsSchema = z.object({
  scl_low: level,
  sda_low: level,
  sda_high: level,
  /** Where the lows of a line cluster, V: one plateau for each driver that can be told from the others. */
  scl_plateaus: z.array(z.object({ v: z.number(), count: z.int() })).optional(),
  sda_plateaus: z.array(z.object({ v: z.number(), count: z.int() })).optional(),
  /** RC of the lines from their median 30 % to 70 % rise; null where no rise was seen. */
  rc_s: z.number().nullable(),
  /** Smallest pull-up for the profile's drivers, and the largest line capacitance times pull-up that still rises in time. */
  rp_min_ohm: z.number().nullable(),
  rc_max_s: z.number().nullable(),
});

/** A controller log beside the capture. Times are on the capture's clock: (time in the log - offset_s) / (1 + drift). */
export const LogSchema = z.object({
  /** Whether the two clocks could be brought together, from the reported losses and the contests; without that no line has a place. */
  aligned: z.boolean(),
  entries: z.int(),
  offset_s: z.number().nullable(),
  drift: z.number().nullable(),
  tolerance_s: z.number().nullable(),
  /** Those that fall into the record, in order, at most 5,000. */
  lines: z.array(z.object({ time_s: z.number(), controller: z.string().nullable(), message: z.string(), loss: z.boolean() })),
});

export const ReportSchema = z.object({
  schema: z.literal(REPORT_SCHEMA),
  capture: CaptureSchema,
  transactions: z.array(TransactionSchema),
  stretches: z.array(StretchSchema),
  contests: z.array(ContestSchema),
  faults: z.array(FaultSchema),
  measurements: z.array(MeasurementSchema),
  violations: z.array(ViolationSchema),
  controllers: z.array(ControllerSchema),
  limits: z.object({
    profile: z.string(),
    source: z.string(),
    version: z.int().optional(),
    base: z.string().nullable().optional(),
  }),
  verdict: z.enum(["pass", "fail", "undecided"]),
  levels: LevelsSchema.nullable().optional(),
  harmless: z.array(HarmlessSchema).optional(),
  /** Faults of each kind, listed or not. */
  fault_totals: z.record(z.string(), z.int()).optional(),
  /** Two or three plain sentences. */
  lede: z.array(z.string()).optional(),
  log: LogSchema.nullable().optional(),
  target_contests: z.array(TargetContestSchema).optional(),
  /** Only a retry, a log or a tap could speak for these; none where no two controllers were found. */
  blind_pairs: z.array(BlindPairSchema).optional(),
});

export type Report = z.infer<typeof ReportSchema>;
/** The report without its transactions: small however long the capture, so it crosses threads and is stored as a summary. */
export type Summary = Omit<Report, "transactions"> & { readonly transactionCount: number };
export type TargetContest = z.infer<typeof TargetContestSchema>;
export type BlindPair = z.infer<typeof BlindPairSchema>;
export type PlacedLog = z.infer<typeof LogSchema>;
export type Contest = z.infer<typeof ContestSchema>;
export type Fault = z.infer<typeof FaultSchema>;
export type FaultKind = Fault["kind"];
export type Harmless = z.infer<typeof HarmlessSchema>;
export type HarmlessKind = Harmless["kind"];
export type Stretch = z.infer<typeof StretchSchema>;
export type Measurement = z.infer<typeof MeasurementSchema>;
export type Violation = z.infer<typeof ViolationSchema>;
export type Levels = z.infer<typeof LevelsSchema>;
export type ControllerRow = z.infer<typeof ControllerSchema>;
