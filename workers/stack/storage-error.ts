// In: nothing. Out: the refusals of the storage fake, with the codes and statuses that S3 documents.

const STATUS = {
  AccessDenied: 403,
  BadDigest: 400,
  BucketAlreadyOwnedByYou: 409,
  BucketNotEmpty: 409,
  EntityTooLarge: 400,
  EntityTooSmall: 400,
  IncompleteBody: 400,
  InternalError: 500,
  InvalidArgument: 400,
  InvalidAccessKeyId: 403,
  InvalidPart: 400,
  InvalidPartOrder: 400,
  InvalidRange: 416,
  InvalidRequest: 400,
  KeyTooLongError: 400,
  MalformedXML: 400,
  MethodNotAllowed: 405,
  MissingContentLength: 411,
  NoSuchBucket: 404,
  NoSuchKey: 404,
  NoSuchUpload: 404,
  NotImplemented: 501,
  NotModified: 304,
  PreconditionFailed: 412,
  RequestTimeTooSkewed: 403,
  SignatureDoesNotMatch: 403,
  SlowDown: 503,
  XAmzContentSHA256Mismatch: 400,
} as const;

export type StorageCode = keyof typeof STATUS;

/** A request that is refused; answered as the XML error document that S3 clients read. */
export class StorageError extends Error {
  readonly code: StorageCode;
  readonly status: number;

  constructor(code: StorageCode, message: string) {
    super(message);
    this.name = "StorageError";
    this.code = code;
    this.status = STATUS[code];
  }
}
