// In: nothing. Out: the saved case as plain data: what lies in JSON columns, what a share link opens, what an export holds.
// The engine's own types are mapped into these and never saved as they are; a change here is a new version and one more
// step in upgrade.ts.

import { z } from "zod";
import { ReportSchema } from "../diagnosis/report";

export const CASE_FORMAT = "firstlow.case/1";
export const SETTINGS_VERSION = 1;

/** Longest texts that are kept, in characters. */
export const TEXT_LIMIT = {
  title: 200,
  note: 8_000,
  finding: 60_000,
  remark: 500,
  name: 120,
  file: 255,
  view: 4_000,
  log: 1_000_000,
} as const;

export const statuses = ["open", "in-work", "answered", "closed"] as const;
export const StatusSchema = z.enum(statuses);
export type Status = z.infer<typeof StatusSchema>;

export const statusWords: Record<Status, string> = {
  open: "open",
  "in-work": "in work",
  answered: "answered",
  closed: "closed",
};

/** A person's text with line ends made equal, without NUL (PostgreSQL cannot hold it). */
function text(limit: number) {
  return z
    .string()
    .max(limit, `at most ${limit.toLocaleString("en-GB")} characters`)
    .transform((value) => value.replaceAll("\u0000", "").replace(/\r\n?/g, "\n"));
}

/** One line: trimmed, not empty. */
function line(limit: number) {
  return z
    .string()
    .transform((value) => value.replace(/[\p{Cc}\s]+/gu, " ").trim())
    .pipe(z.string().min(1, "must not be empty").max(limit, `at most ${limit} characters`));
}

export const TitleSchema = line(TEXT_LIMIT.title);
export const NameSchema = line(TEXT_LIMIT.name);
export const FindingSchema = text(TEXT_LIMIT.finding);
export const NoteTextSchema = text(TEXT_LIMIT.note).refine((value) => value.trim() !== "", "must not be empty");
export const RemarkSchema = text(TEXT_LIMIT.remark);
export const LogTextSchema = text(TEXT_LIMIT.log);

const tick = z.number().refine(Number.isSafeInteger, "a whole number of ticks");

/** What a note or a fault tag stands on. Ticks are those of the capture's time base; `whole` is the capture itself. */
export const AnchorSchema = z.discriminatedUnion("kind", [
  z.object({ kind: z.literal("transaction"), transaction: z.int().min(0) }),
  z
    .object({ kind: z.literal("range"), from_tick: tick, to_tick: tick })
    .refine((range) => range.from_tick <= range.to_tick, "a range ends after it begins"),
  z.object({ kind: z.literal("whole") }),
]);
export type Anchor = z.infer<typeof AnchorSchema>;

const channel = z.string().min(1).max(500);
const volts = z.number().min(-1000).max(1000);

/** The person's answers to the reader (ReadChoices of lib/engine/samples/reader.ts), as they are kept. */
export const ReadSchema = z.object({
  scl: channel.optional(),
  sda: channel.optional(),
  taps: z
    .array(
      z.object({
        label: z.string().min(1).max(80),
        scl: channel.nullable(),
        sda: channel.nullable(),
        polarity: z.enum(["drive", "release"]),
      }),
    )
    .max(16)
    .optional(),
  interval_s: z.number().positive().max(3600).optional(),
  vdd_v: volts.optional(),
  vil_v: volts.optional(),
  vih_v: volts.optional(),
  pullup: z.boolean().optional(),
});
export type Read = z.infer<typeof ReadSchema>;

/** Which limits judge the captures of a case. A team's own profile is named with the version it had. */
export const LimitsChoiceSchema = z.discriminatedUnion("kind", [
  z.object({ kind: z.literal("automatic") }),
  z.object({ kind: z.literal("built-in"), name: z.string().min(1).max(80) }),
  z.object({ kind: z.literal("team"), profile: z.uuid(), version: z.int().min(1) }),
]);
export type LimitsChoice = z.infer<typeof LimitsChoiceSchema>;

const bound = z.number().min(0).nullable().optional();

/** What a team's own profile changes of its base, by symbol; in ns, frequencies in Hz (lib/limits/profile.ts `Changes`). */
export const LimitChangesSchema = z.record(
  z.string().min(1).max(40),
  z.object({ min: bound, max: bound, source: z.string().max(300).optional() }),
);
export type LimitChanges = z.infer<typeof LimitChangesSchema>;

/** Settings shared by the captures of a case; what was read how stands with each capture. */
export const SettingsSchema = z.object({
  version: z.literal(SETTINGS_VERSION),
  limits: LimitsChoiceSchema,
  /** Bus capacitance for High-speed, picofarad. */
  cb_pf: z.number().min(1).max(10_000).nullable(),
  roster: z.uuid().nullable(),
});
export type Settings = z.infer<typeof SettingsSchema>;

export const defaultSettings: Settings = {
  version: SETTINGS_VERSION,
  limits: { kind: "automatic" },
  cb_pf: null,
  roster: null,
};

/** The report without its transactions, as it is stored beside an archive. */
export const SummarySchema = ReportSchema.omit({ transactions: true }).extend({ transactionCount: z.int().min(0) });

/** How ticks of notes and archive become seconds (lib/base/time.ts). */
export const TimebaseSchema = z.object({
  ticksPerSecond: z.number().positive(),
  origin: z.enum(["file", "given", "assumed"]),
});

export const CaptureFileSchema = z.object({
  id: z.uuid(),
  /** Place in the case, from 1. */
  ordinal: z.int().min(1),
  name: z.string(),
  size: z.int().min(0),
  sha256: z.string(),
  uploaded_by: z.string(),
  created_at: z.iso.datetime(),
  read: ReadSchema,
  /** Controller log imported with it, as text (lib/diagnosis/log.ts reads it). */
  log: z.string().nullable(),
  timebase: TimebaseSchema.nullable(),
  /** Bytes of the edge archive, or null while there is none. */
  archive_size: z.int().nullable(),
  /** Null until the capture was decoded. */
  summary: SummarySchema.nullable(),
});
export type CaptureFile = z.infer<typeof CaptureFileSchema>;

export const NoteFileSchema = z.object({
  id: z.uuid(),
  /** Footnote number in the case, from 1, never given twice. */
  number: z.int().min(1),
  /** Null for a note on the case as a whole. */
  capture: z.uuid().nullable(),
  anchor: AnchorSchema,
  text: z.string(),
  author: z.string(),
  created_at: z.iso.datetime(),
  edited_at: z.iso.datetime(),
  version: z.int(),
});
export type NoteFile = z.infer<typeof NoteFileSchema>;

/** A fault tag of the team's catalogue: the category, its word and its key. */
export const FaultTagFileSchema = z.object({
  id: z.uuid(),
  name: z.string(),
  key: z.string().nullable(),
  description: z.string(),
  retired: z.boolean(),
});
export type FaultTagFile = z.infer<typeof FaultTagFileSchema>;

/** A fault tag put on a place of a capture. */
export const TagFileSchema = z.object({
  id: z.uuid(),
  capture: z.uuid(),
  fault_tag: z.uuid(),
  anchor: AnchorSchema,
  remark: z.string(),
  author: z.string(),
  created_at: z.iso.datetime(),
});
export type TagFile = z.infer<typeof TagFileSchema>;

/** A device or controller of a roster (RosterEntry of lib/forensics/contract.ts), as it is kept. */
export const RosterEntrySchema = z.object({
  role: z.enum(["controller", "target"]),
  address: z.int().min(0).max(1023).nullable(),
  name: NameSchema,
  tlow_s: z.number().positive().nullable(),
  thigh_s: z.number().positive().nullable(),
  vol_v: z.number().min(-1).max(10).nullable(),
  stretch_allow_s: z.number().min(0).nullable(),
  registers: z.string().max(4_000),
});
export type RosterRow = z.infer<typeof RosterEntrySchema>;

/** The whole case as one piece of data. */
export const CaseFileSchema = z.object({
  format: z.literal(CASE_FORMAT),
  team: z.string(),
  number: z.int().min(1),
  title: z.string(),
  status: StatusSchema,
  assignee: z.string().nullable(),
  finding: z.string(),
  settings: SettingsSchema,
  captures: z.array(CaptureFileSchema),
  notes: z.array(NoteFileSchema),
  tags: z.array(TagFileSchema),
  /** The fault tags that `tags` name. */
  fault_tags: z.array(FaultTagFileSchema),
  roster: z.array(RosterEntrySchema),
  /** The team's own limits as they were when chosen; null for automatic and built-in. */
  profile: z.object({ name: z.string(), version: z.int(), base: z.string(), changes: LimitChangesSchema }).nullable(),
  created_at: z.iso.datetime(),
  updated_at: z.iso.datetime(),
});
export type CaseFile = z.infer<typeof CaseFileSchema>;
