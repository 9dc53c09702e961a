// In: a call about a bucket. Out: create, head, delete, ListObjectsV2, DeleteObjects, ListBuckets.

import { bucketOf, type Call, queryNumber, readText, sendNothing, sendXml } from "./storage-call";
import type { Bucket, StoredObject } from "./storage-disk";
import { StorageError } from "./storage-error";
import { xmlDocument, xmlElements, xmlText } from "./storage-xml";

export async function listBuckets(call: Call): Promise<void> {
  const names = [...call.disk.buckets.keys()].sort();
  sendXml(call, xmlDocument("ListAllMyBucketsResult", { Buckets: { Bucket: names.map((Name) => ({ Name })) } }));
}

export async function createBucket(call: Call): Promise<void> {
  if (call.disk.buckets.has(call.bucketName)) throw new StorageError("BucketAlreadyOwnedByYou", "The bucket is there already.");
  await call.disk.create(call.bucketName);
  sendNothing(call, 200, { Location: `/${call.bucketName}` });
}

export async function headBucket(call: Call): Promise<void> {
  bucketOf(call);
  sendNothing(call, 200, { "x-amz-bucket-region": call.region });
}

export async function locateBucket(call: Call): Promise<void> {
  bucketOf(call);
  sendXml(call, xmlDocument("LocationConstraint", {}));
}

export async function deleteBucket(call: Call): Promise<void> {
  if (bucketOf(call).objects.size) throw new StorageError("BucketNotEmpty", "The bucket still holds objects.");
  await call.disk.remove(call.bucketName);
  sendNothing(call, 204);
}

interface Page {
  readonly objects: StoredObject[];
  readonly prefixes: string[];
  /** The last name on a page that is not the last one. */
  readonly next?: string;
}

export async function listObjects(call: Call): Promise<void> {
  const prefix = call.query.get("prefix") ?? "";
  const delimiter = call.query.get("delimiter") ?? "";
  const most = queryNumber(call, "max-keys", 1000, 1000);
  const token = call.query.get("continuation-token");
  const after = token === undefined ? (call.query.get("start-after") ?? "") : Buffer.from(token, "base64url").toString("utf8");
  const page = listPage(bucketOf(call), prefix, delimiter, after, most);
  const name = call.query.get("encoding-type") === "url" ? encodeURIComponent : (text: string) => text;
  sendXml(
    call,
    xmlDocument("ListBucketResult", {
      Name: call.bucketName,
      Prefix: name(prefix),
      Delimiter: delimiter || undefined,
      MaxKeys: most,
      EncodingType: call.query.get("encoding-type"),
      KeyCount: page.objects.length + page.prefixes.length,
      IsTruncated: page.next !== undefined,
      ContinuationToken: token,
      NextContinuationToken: page.next === undefined ? undefined : Buffer.from(page.next).toString("base64url"),
      Contents: page.objects.map((object) => ({
        Key: name(object.key),
        LastModified: new Date(object.modified).toISOString(),
        ETag: `"${object.etag}"`,
        Size: object.size,
        StorageClass: "STANDARD",
      })),
      CommonPrefixes: page.prefixes.map((found) => ({ Prefix: name(found) })),
    }),
  );
}

function listPage(bucket: Bucket, prefix: string, delimiter: string, after: string, most: number): Page {
  const objects: StoredObject[] = [];
  const prefixes: string[] = [];
  let last = after;
  // S3 lists keys in the order of their UTF-8 bytes.
  const keys = [...bucket.objects.keys()]
    .filter((key) => key.startsWith(prefix))
    .sort((a, b) => Buffer.compare(Buffer.from(a), Buffer.from(b)));
  for (const key of keys) {
    const cut = delimiter ? key.indexOf(delimiter, prefix.length) : -1;
    const name = cut < 0 ? key : key.slice(0, cut + delimiter.length);
    if (Buffer.compare(Buffer.from(name), Buffer.from(last)) <= 0) continue;
    if (objects.length + prefixes.length >= most) return { objects, prefixes, next: last };
    const object = bucket.objects.get(key);
    if (cut >= 0) prefixes.push(name);
    else if (object) objects.push(object);
    last = name;
  }
  return { objects, prefixes };
}

export async function deleteObjects(call: Call): Promise<void> {
  const bucket = bucketOf(call);
  const text = await readText(call);
  const keys = xmlElements(text, "Object").map((object) => xmlText(object, "Key"));
  if (!keys.length || keys.length > 1000) throw new StorageError("MalformedXML", "The document must list 1 to 1000 keys.");
  for (const key of keys) await bucket.inTurn(key, () => bucket.remove(key));
  const quiet = /<Quiet>true<\/Quiet>/.test(text);
  sendXml(call, xmlDocument("DeleteResult", quiet ? {} : { Deleted: keys.map((Key) => ({ Key })) }));
}
