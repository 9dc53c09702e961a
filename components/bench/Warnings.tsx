import type { Warning } from "@/lib/base/result";
import { count } from "@/lib/view/format";

/** What the reader assumed or set aside. Folded, but never silent. */
export function Warnings({ warnings }: { warnings: readonly Warning[] }) {
  if (warnings.length === 0) return null;
  return (
    <>
      <details className="screen-only font-sans text-label text-quiet">
        <summary className="w-fit border-b border-field hover:text-ink">
          {count(warnings.length)} {warnings.length === 1 ? "remark" : "remarks"} on the reading
        </summary>
        <div className="mt-2 border-l border-hairline pl-4">
          <Remarks warnings={warnings} />
        </div>
      </details>
      <div className="print-only">
        <Remarks warnings={warnings} />
      </div>
    </>
  );
}

function Remarks({ warnings }: { warnings: readonly Warning[] }) {
  return (
    <ul className="max-w-[80ch] space-y-1.5 font-serif text-body text-ink">
      {warnings.map((warning) => (
        <li key={`${warning.code}${warning.line ?? ""}${warning.message}`}>
          {warning.message}
          {warning.line !== undefined && <span className="text-quiet"> (line {count(warning.line)})</span>}
        </li>
      ))}
    </ul>
  );
}
