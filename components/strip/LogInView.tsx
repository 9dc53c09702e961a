import type { Capture } from "@/lib/view/capture";
import { count, duration, instant, timeDigits } from "@/lib/view/format";
import type { Bounds } from "@/lib/view/scale";
import { CodeMeanings } from "./CodeMeanings";

const LISTED = 40;

/** The lines of the controller log under the part of the strip that is shown, and how its clock stands to the capture's. */
export function LogInView({ capture, span }: { capture: Capture; span: Bounds }) {
  const log = capture.summary?.log ?? null;
  if (log === null) return null;
  const { timebase, sampleTicks } = capture.head;
  const perSecond = timebase.ticksPerSecond;
  const seen = log.lines.filter(({ time_s }) => time_s * perSecond >= span.from && time_s * perSecond <= span.to);
  const digits = Math.min(7, timeDigits(timebase, sampleTicks));
  return (
    <section aria-label="Controller log" className="mt-5">
      <h3 className="border-b border-ink font-serif text-[1.0625rem] italic">Controller log</h3>
      <p className="mt-1 font-serif text-body text-quiet">
        {log.aligned && log.offset_s !== null && log.tolerance_s !== null && log.drift !== null
          ? `Its clock is ${duration(Math.abs(log.offset_s))} ${log.offset_s < 0 ? "behind" : "ahead of"} the capture's${log.drift === 0 ? "" : ` and drifts by ${Math.round(log.drift * 1e6)} ppm`}, found from the losses it reports; good to ${duration(log.tolerance_s)}.`
          : `Its ${count(log.entries)} ${log.entries === 1 ? "line has" : "lines have"} no place in this record: fewer than two reported losses fit the contests found, so the two clocks cannot be brought together.`}
      </p>
      <CodeMeanings messages={log.lines.map(({ message }) => message)} />
      {log.aligned && seen.length === 0 && <p className="mt-1 font-serif text-body text-quiet">No line of it falls in view.</p>}
      <ol className="mt-1 font-sans text-label">
        {seen.slice(0, LISTED).map((line) => (
          <li
            key={`${line.time_s} ${line.message}`}
            className="grid grid-cols-[7.5rem_minmax(0,1fr)] items-baseline gap-x-2 border-b border-hairline py-1"
          >
            <span className="tabular pl-2 text-hex">{instant(line.time_s * perSecond, timebase, digits)}</span>
            <span className={`min-w-0 [overflow-wrap:anywhere] ${line.loss ? "text-contest" : ""}`}>
              {line.controller !== null && <span className="text-quiet">{line.controller}: </span>}
              {line.message}
            </span>
          </li>
        ))}
      </ol>
      {seen.length > LISTED && (
        <p className="mt-1 font-serif text-body text-quiet">
          {count(seen.length - LISTED)} more in view; look nearer to have them listed.
        </p>
      )}
    </section>
  );
}
