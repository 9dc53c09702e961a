const day = new Intl.DateTimeFormat("en-GB", { dateStyle: "medium", timeZone: "UTC" });
const minute = new Intl.DateTimeFormat("en-GB", { dateStyle: "medium", timeStyle: "short", timeZone: "UTC" });

/** A date the same on server and page: in UTC, and said so where the hour shows. */
export function Day({ at, hour = false }: { at: Date; hour?: boolean }) {
  return <time dateTime={at.toISOString()}>{hour ? `${minute.format(at)} UTC` : day.format(at)}</time>;
}
