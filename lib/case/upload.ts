// In: nothing. Out: the upload protocol: what the browser asks for, what the server answers, and the limits both keep.
//
//   POST   /api/uploads                    StartUpload   -> UploadAnswer   a multipart upload, straight to storage
//   GET    /api/uploads                                  -> UploadList     one's own unfinished uploads (after a reload)
//   GET    /api/uploads/[id]                             -> UploadAnswer   which parts are there already
//   POST   /api/uploads/[id]/parts         SignParts     -> SignedParts    then PUT each part to its address
//   POST   /api/uploads/[id]/complete      CompleteUpload-> CaptureAnswer  the server checks; only now a capture exists
//   DELETE /api/uploads/[id]                             -> 204            cancels
//   POST   /api/captures/[id]/archive      StartArchive  -> SignedArchive  then PUT the edge archive to its address
//   PUT    /api/captures/[id]/analysis     StoreAnalysis -> CaptureAnswer  the server checks, reads and keeps the archive
//   PUT    /api/captures/[id]/reading      Analyse       -> CaptureAnswer  the same from the original, without a browser
//   GET    /api/captures/[id]/archive                    -> 307 to storage
//   GET    /api/captures/[id]/raw                        -> 307 to storage
//   GET    /api/captures/[id]/report                     -> the report as JSON
//   DELETE /api/captures/[id]                            -> 204
//
// A part that is there already, with the checksum of the same slice of the local file, need not be sent again.

import { z } from "zod";
import { CaptureFileSchema, LogTextSchema, ReadSchema, TEXT_LIMIT } from "./case";

const MEBI = 1_048_576;

/** Bytes, unless named otherwise. S3 allows parts of 5 MiB to 5 GiB (the last may be smaller) and 10,000 of them. */
export const UPLOAD_LIMIT = {
  /** Largest capture file. */
  size: 4_096 * MEBI,
  part: 8 * MEBI,
  parts: 10_000,
  /** Unfinished uploads one person may have. */
  open: 20,
  /** Part addresses signed in one request. */
  sign: 100,
  /** Seconds a signed address works. */
  signed: 3_600,
  /** Hours after which an upload nobody touched is swept. */
  stale: 48,
  archive: 512 * MEBI,
} as const;

const sha256 = z.string().regex(/^[0-9a-f]{64}$/, "a SHA-256 in 64 hexadecimal digits");
const etag = z.string().min(1).max(200);

/** The name without folders and control characters; it is shown and offered at download, never used as a path. */
export const FileNameSchema = z
  .string()
  .transform((name) =>
    name
      .replace(/^.*[/\\]/, "")
      .replace(/\p{Cc}/gu, "")
      .trim(),
  )
  .pipe(z.string().min(1, "must not be empty").max(TEXT_LIMIT.file, `at most ${TEXT_LIMIT.file} characters`));

export const StartUploadSchema = z.object({
  /** Number of the case the capture is for. */
  case: z.int().min(1),
  name: FileNameSchema,
  size: z.int().min(1, "the file is empty"),
});
export type StartUpload = z.input<typeof StartUploadSchema>;

export const PartSchema = z.object({ number: z.int(), size: z.int(), sha256, etag: z.string() });

export const UploadSchema = z.object({
  id: z.uuid(),
  case: z.int(),
  name: z.string(),
  size: z.int(),
  part_size: z.int(),
  parts: z.int(),
  state: z.enum(["open", "checking", "complete", "refused", "cancelled"]),
  /** Parts that arrived whole, by number. */
  received: z.array(PartSchema),
  /** The capture it became. */
  capture: z.uuid().nullable(),
  created_at: z.iso.datetime(),
  expires_at: z.iso.datetime(),
});
export type Upload = z.infer<typeof UploadSchema>;
export const UploadAnswerSchema = z.object({ upload: UploadSchema });
export const UploadListSchema = z.object({ uploads: z.array(UploadSchema) });

/** Parts count from 1. Every part but the last has `part_size` bytes. */
export const SignPartsSchema = z.object({
  parts: z
    .array(z.object({ number: z.int().min(1).max(UPLOAD_LIMIT.parts), sha256 }))
    .min(1)
    .max(UPLOAD_LIMIT.sign),
});
export type SignParts = z.input<typeof SignPartsSchema>;
/** PUT exactly `size` bytes; the address works for no other length. */
export const SignedPartsSchema = z.object({
  parts: z.array(z.object({ number: z.int(), size: z.int(), url: z.string() })),
  expires_at: z.iso.datetime(),
});
export type SignedParts = z.infer<typeof SignedPartsSchema>;

/** The ETag storage answered for each part, all of them in order. */
export const CompleteUploadSchema = z.object({
  parts: z
    .array(z.object({ number: z.int().min(1), etag }))
    .min(1)
    .max(UPLOAD_LIMIT.parts),
  read: ReadSchema.default({}),
});
export type CompleteUpload = z.input<typeof CompleteUploadSchema>;
export const CaptureAnswerSchema = z.object({ capture: CaptureFileSchema });
export type CaptureAnswer = z.infer<typeof CaptureAnswerSchema>;

export const StartArchiveSchema = z.object({ size: z.int().min(1), sha256 });
export type StartArchive = z.input<typeof StartArchiveSchema>;
/** `key` goes back with StoreAnalysis. */
export const SignedArchiveSchema = z.object({ key: z.string(), url: z.string(), expires_at: z.iso.datetime() });
export type SignedArchive = z.infer<typeof SignedArchiveSchema>;

/** The server reads the archive itself under the case's settings and stores its own summary: no figure is taken on trust. */
export const StoreAnalysisSchema = z.object({
  archive: z.object({ key: z.string().min(1).max(500), size: z.int().min(1), sha256 }),
  read: ReadSchema,
  /** Controller log it was judged with. */
  log: LogTextSchema.nullable().default(null),
});
export type StoreAnalysis = z.input<typeof StoreAnalysisSchema>;

/** PUT /api/captures/[id]/reading: the server reads the original itself and makes the archive. */
export const AnalyseSchema = z.object({ read: ReadSchema.default({}), log: LogTextSchema.nullable().default(null) });
export type Analyse = z.input<typeof AnalyseSchema>;

/** Part length for a file: 8 MiB, or what keeps it within 10,000 parts. */
export function partSize(size: number): number {
  return Math.max(UPLOAD_LIMIT.part, Math.ceil(size / UPLOAD_LIMIT.parts / MEBI) * MEBI);
}
