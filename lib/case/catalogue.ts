// In: nothing. Out: the team's lists and how they are asked for: fault tags with their keys, rosters, limits profiles,
// members to assign to. Schemas for /api/fault-tags, /api/rosters, /api/profiles, /api/people.

import { z } from "zod";
import { FaultTagFileSchema, LimitChangesSchema, NameSchema, RosterEntrySchema } from "./case";

/** Single keys a fault tag may have. The others move through the stack (components own that list). */
export const TAG_KEYS = "1234567890abcdefghilmnopqrstuvwxyz";

const key = z
  .string()
  .regex(/^[a-z0-9]$/, "one letter or digit")
  .nullable();

/** What a new team starts with; names are the words of the fault kinds and of the trade. */
export const defaultFaultTags: readonly { readonly name: string; readonly key: string; readonly description: string }[] = [
  { name: "lost arbitration", key: "1", description: "A controller yielded to another one, or says that it did." },
  { name: "not acknowledged", key: "2", description: "An address or a data byte without ACK that should have had one." },
  { name: "stretched too long", key: "3", description: "SCL held low beyond what the bus or the device allows." },
  { name: "outside limits", key: "4", description: "An interval or a level breaks the limits profile." },
  { name: "broken message", key: "5", description: "Short byte, misplaced START or STOP, missing STOP." },
  { name: "noise", key: "6", description: "A spike, a dip or crosstalk that no device drove." },
  { name: "stuck line", key: "7", description: "SCL or SDA stays low and the bus does not come free." },
  { name: "wrong data", key: "8", description: "Well-formed on the wire, but not what the device should say." },
  { name: "as intended", key: "9", description: "Looked at and found in order." },
  { name: "needs a second look", key: "0", description: "Cannot be told from this capture." },
];

export const FaultTagListSchema = z.object({ fault_tags: z.array(FaultTagFileSchema) });
export const CreateFaultTagSchema = z.object({
  name: NameSchema,
  key: key.default(null),
  description: z.string().trim().max(500).default(""),
});
export type CreateFaultTag = z.input<typeof CreateFaultTagSchema>;
/** A retired tag stays on what it was put on and is offered no more. */
export const EditFaultTagSchema = z.object({
  name: NameSchema.optional(),
  key: key.optional(),
  description: z.string().trim().max(500).optional(),
  retired: z.boolean().optional(),
});
export type EditFaultTag = z.input<typeof EditFaultTagSchema>;
export const FaultTagAnswerSchema = z.object({ fault_tag: FaultTagFileSchema });

export const ROSTER_LIMIT = 500;
export const RosterViewSchema = z.object({
  id: z.uuid(),
  name: z.string(),
  version: z.int(),
  entries: z.array(RosterEntrySchema),
  updated_at: z.iso.datetime(),
});
export type RosterView = z.infer<typeof RosterViewSchema>;
export const RosterListSchema = z.object({ rosters: z.array(RosterViewSchema) });
export const SaveRosterSchema = z.object({ name: NameSchema, entries: z.array(RosterEntrySchema).max(ROSTER_LIMIT) });
export type SaveRoster = z.input<typeof SaveRosterSchema>;
/** PUT with the version that was read; a roster changed meanwhile answers 409 with `theirs`. */
export const ReplaceRosterSchema = SaveRosterSchema.extend({ version: z.int().min(1) });
export type ReplaceRoster = z.input<typeof ReplaceRosterSchema>;
/** POST /api/rosters/import: a roster out of CSV text; GET /api/rosters/[id]/csv gives one back. */
export const ImportRosterSchema = z.object({ name: NameSchema, csv: z.string().min(1, "is empty").max(1_000_000) });
export type ImportRoster = z.input<typeof ImportRosterSchema>;
export const RosterAnswerSchema = z.object({ roster: RosterViewSchema });

/** A limits profile of the team: `derive(builtIn(base), name, version, changes)` of lib/limits/profile.ts. */
export const ProfileViewSchema = z.object({
  id: z.uuid(),
  name: z.string(),
  version: z.int(),
  base: z.string(),
  changes: LimitChangesSchema,
  updated_at: z.iso.datetime(),
});
export type ProfileView = z.infer<typeof ProfileViewSchema>;
export const ProfileListSchema = z.object({ profiles: z.array(ProfileViewSchema) });
export const SaveProfileSchema = z.object({
  name: NameSchema.pipe(z.string().max(80)),
  base: NameSchema,
  changes: LimitChangesSchema,
});
export type SaveProfile = z.input<typeof SaveProfileSchema>;
/** Every change is a new version; earlier ones stay, for the cases judged by them. */
export const ReplaceProfileSchema = SaveProfileSchema.extend({ version: z.int().min(1) });
export type ReplaceProfile = z.input<typeof ReplaceProfileSchema>;
export const ProfileAnswerSchema = z.object({ profile: ProfileViewSchema });

/** Members a case can be assigned to. */
export const PeopleSchema = z.object({ people: z.array(z.object({ id: z.uuid(), name: z.string(), role: z.string() })) });
