/** An instant as people write it; the full one is in the title. The same on server and browser, so in UTC. */
export function When({ at }: { at: string }) {
  const date = new Date(at);
  const day = date.toLocaleDateString("en-GB", { day: "numeric", month: "short", year: "numeric", timeZone: "UTC" });
  const time = date.toLocaleTimeString("en-GB", { hour: "2-digit", minute: "2-digit", timeZone: "UTC" });
  return (
    <time dateTime={at} title={`${day}, ${time} UTC`}>
      {day}
    </time>
  );
}
