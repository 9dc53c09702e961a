// In: nothing. Out: what the browser and the server say to each other about cases: a zod schema for every request body,
// query and answer of app/api (uploads stand in upload.ts, the team's lists in catalogue.ts). Times are ISO 8601 in UTC.
// Errors are problem+json; a 409 of an edit also carries `theirs`, the answer of a fresh read, so that nothing is lost.

import { z } from "zod";
import {
  AnchorSchema,
  CaseFileSchema,
  FindingSchema,
  NoteFileSchema,
  NoteTextSchema,
  RemarkSchema,
  SettingsSchema,
  StatusSchema,
  TagFileSchema,
  TEXT_LIMIT,
  TitleSchema,
} from "./case";
import { actions } from "./roles";

export const PersonSchema = z.object({ id: z.uuid(), name: z.string() });
export type Person = z.infer<typeof PersonSchema>;

// GET /api/cases ------------------------------------------------------------------------------------------------------

export const CASE_PAGE = 50;

/** Query of the list. `q` is searched in title, finding and file names; a bare number, or #number, also by number. */
export const CaseQuerySchema = z.object({
  q: z.string().max(200).default(""),
  status: z
    .string()
    .default("")
    .transform((value) => value.split(",").filter((word) => word !== ""))
    .pipe(z.array(StatusSchema)),
  /** A member's id, `me`, or `nobody`. */
  assignee: z.union([z.uuid(), z.literal("me"), z.literal("nobody"), z.literal("")]).default(""),
  verdict: z.enum(["pass", "fail", "undecided", "none", ""]).default(""),
  sort: z.enum(["updated", "number", "title"]).default("updated"),
  page: z.coerce.number().int().min(1).max(100_000).default(1),
});
export type CaseQuery = z.infer<typeof CaseQuerySchema>;

export const CaseRowSchema = z.object({
  number: z.int(),
  title: z.string(),
  status: StatusSchema,
  assignee: PersonSchema.nullable(),
  captures: z.int(),
  notes: z.int(),
  tags: z.int(),
  /** The worst verdict among its captures; null while none was decoded. */
  verdict: z.enum(["pass", "fail", "undecided"]).nullable(),
  /** Totals over its captures. */
  transactions: z.int(),
  faults: z.int(),
  contests: z.int(),
  shared: z.boolean(),
  created_at: z.iso.datetime(),
  updated_at: z.iso.datetime(),
});
export type CaseRow = z.infer<typeof CaseRowSchema>;

export const CaseListSchema = z.object({ cases: z.array(CaseRowSchema), total: z.int(), page: z.int(), pages: z.int() });
export type CaseList = z.infer<typeof CaseListSchema>;

// POST /api/cases, GET, PATCH, DELETE /api/cases/[number] ---------------------------------------------------------------

export const CreateCaseSchema = z.object({ title: TitleSchema, settings: SettingsSchema.optional() });
export type CreateCase = z.input<typeof CreateCaseSchema>;

/** A case as a member reads it. */
export const CaseViewSchema = CaseFileSchema.omit({ assignee: true }).extend({
  id: z.uuid(),
  /** To be sent back with an edit. */
  version: z.int(),
  assignee: PersonSchema.nullable(),
  /** What this viewer may do with this case (lib/case/roles.ts). */
  may: z.array(z.enum(actions)),
});
export type CaseView = z.infer<typeof CaseViewSchema>;

/**
 * Only the fields given are changed. `version` is the one the fields were read at: where somebody has since changed one of
 * the same fields the answer is 409 with `theirs`; a change of other fields does not stand in the way.
 */
export const EditCaseSchema = z
  .object({
    version: z.int().min(1),
    title: TitleSchema.optional(),
    status: StatusSchema.optional(),
    assignee: z.uuid().nullable().optional(),
    finding: FindingSchema.optional(),
    settings: SettingsSchema.optional(),
  })
  .refine((edit) => Object.keys(edit).length > 1, "nothing to change");
export type EditCase = z.input<typeof EditCaseSchema>;
export const caseFields = ["title", "status", "assignee", "finding", "settings"] as const;
export type CaseField = (typeof caseFields)[number];

// GET /api/cases/[number]/events ----------------------------------------------------------------------------------------

export const eventKinds = [
  "case.created",
  "case.edited",
  "capture.added",
  "capture.analysed",
  "capture.removed",
  "note.added",
  "note.edited",
  "note.removed",
  "tag.added",
  "tag.removed",
  "share.created",
  "share.revoked",
  "share.edited",
] as const;

export const EventSchema = z.object({
  id: z.uuid(),
  kind: z.enum(eventKinds),
  /** Null for a person who has since left. */
  actor: PersonSchema.nullable(),
  /** One sentence, without the actor. */
  words: z.string(),
  /** For edits: what stood there before and after, by field. */
  before: z.record(z.string(), z.unknown()).nullable(),
  after: z.record(z.string(), z.unknown()).nullable(),
  at: z.iso.datetime(),
});
export type Event = z.infer<typeof EventSchema>;
export const EventListSchema = z.object({ events: z.array(EventSchema) });

// POST /api/cases/[number]/notes, PATCH and DELETE /api/cases/[number]/notes/[id] ---------------------------------------

const anchored = { capture: z.uuid().nullable(), anchor: AnchorSchema };

export const AddNoteSchema = z
  .object({ ...anchored, text: NoteTextSchema })
  .refine((note) => note.capture !== null || note.anchor.kind === "whole", "a place needs the capture it is in");
export type AddNote = z.input<typeof AddNoteSchema>;
export const EditNoteSchema = z.object({ version: z.int().min(1), text: NoteTextSchema });
export type EditNote = z.input<typeof EditNoteSchema>;
/** Body of DELETE: a note somebody has edited meanwhile is not removed unseen. */
export const RemoveNoteSchema = z.object({ version: z.int().min(1) });
export const NoteAnswerSchema = z.object({ note: NoteFileSchema });

// POST /api/cases/[number]/tags: adds and removes in one go --------------------------------------------------------------

export const TAG_BATCH = 1_000;

export const ChangeTagsSchema = z.object({
  add: z
    .array(z.object({ capture: z.uuid(), fault_tag: z.uuid(), anchor: AnchorSchema, remark: RemarkSchema.default("") }))
    .max(TAG_BATCH)
    .default([]),
  remove: z.array(z.uuid()).max(TAG_BATCH).default([]),
});
export type ChangeTags = z.input<typeof ChangeTagsSchema>;
/** `added` in the order asked for. The same fault tag on the same place is there once: asking again answers the one there. */
export const TagsAnswerSchema = z.object({ added: z.array(TagFileSchema), removed: z.array(z.uuid()) });
export type TagsAnswer = z.infer<typeof TagsAnswerSchema>;

// GET, POST /api/cases/[number]/shares, PATCH and DELETE /api/cases/[number]/shares/[id] ----------------------------------

export const SHARE_DAYS = { default: 30, most: 366 } as const;
export const PASSPHRASE = { least: 8, most: 200 } as const;

/** What the address bar held after the `?`: the exact view that is shared. */
export const ViewStateSchema = z
  .string()
  .max(TEXT_LIMIT.view)
  .regex(/^[\x21-\x7e]*$/, "must be a query string");

const passphrase = z.string().min(PASSPHRASE.least, `at least ${PASSPHRASE.least} characters`).max(PASSPHRASE.most);

export const CreateShareSchema = z.object({
  label: z.string().trim().max(TEXT_LIMIT.name).default(""),
  expires_in_days: z.int().min(1).max(SHARE_DAYS.most).default(SHARE_DAYS.default),
  passphrase: passphrase.nullable().default(null),
  raw_allowed: z.boolean().default(false),
  view: ViewStateSchema.default(""),
});
export type CreateShare = z.input<typeof CreateShareSchema>;

export const EditShareSchema = z.object({
  label: z.string().trim().max(TEXT_LIMIT.name).optional(),
  expires_in_days: z.int().min(1).max(SHARE_DAYS.most).optional(),
  passphrase: passphrase.nullable().optional(),
  raw_allowed: z.boolean().optional(),
  view: ViewStateSchema.optional(),
});
export type EditShare = z.input<typeof EditShareSchema>;

export const ShareSchema = z.object({
  id: z.uuid(),
  label: z.string(),
  state: z.enum(["open", "expired", "revoked"]),
  expires_at: z.iso.datetime(),
  revoked_at: z.iso.datetime().nullable(),
  has_passphrase: z.boolean(),
  raw_allowed: z.boolean(),
  view: z.string(),
  created_by: z.string(),
  created_at: z.iso.datetime(),
  opened: z.int(),
  last_opened_at: z.iso.datetime().nullable(),
});
export type Share = z.infer<typeof ShareSchema>;

export const ShareListSchema = z.object({ shares: z.array(ShareSchema) });
/** The only time the secret is ever told: it is stored as a hash. `url` is the link to send. */
export const CreatedShareSchema = z.object({
  share: ShareSchema,
  secret: z.string(),
  url: z.string(),
  removed: z.array(z.string()),
});
export type CreatedShare = z.infer<typeof CreatedShareSchema>;

// POST /api/shared/[secret]/unlock; the share page itself reads through lib/server/shares/read.ts -------------------------

export const UnlockSchema = z.object({ passphrase: z.string().max(PASSPHRASE.most) });
export const UnlockedSchema = z.object({ unlocked: z.literal(true) });

/** What a share page shows. Archives and raw files come from /api/shared/[secret]/captures/[id]/archive and .../raw. */
export const SharedViewSchema = z.object({
  file: CaseFileSchema.omit({ assignee: true }),
  view: z.string(),
  raw_allowed: z.boolean(),
  expires_at: z.iso.datetime(),
});
export type SharedView = z.infer<typeof SharedViewSchema>;
