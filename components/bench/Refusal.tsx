"use client";

import { Notice } from "@/components/ui/Notice";
import type { Problem } from "@/lib/base/result";
import type { CapturePreview } from "@/lib/engine/samples/preview";
import type { ReadChoices } from "@/lib/engine/samples/reader";
import { count } from "@/lib/view/format";
import { Answers } from "./Answers";

export interface RefusalProps {
  problem: Problem;
  preview: CapturePreview | null;
  read: ReadChoices;
  onRead: (read: ReadChoices) => void;
  name: string;
}

function placeWords({ place }: Problem): string {
  if (place.line !== undefined) return `line ${count(place.line)}${place.column === undefined ? "" : `, column ${place.column}`}`;
  return place.byte === undefined ? "" : `byte ${count(place.byte)}`;
}

/** The file cannot be read, or not without an answer: what is wrong, where, and what to do about it here and now. */
export function Refusal({ problem, preview, read, onRead, name }: RefusalProps) {
  const where = placeWords(problem);
  return (
    <Notice kind="broken" title={problem.message}>
      <p>{problem.advice}</p>
      <p className="mt-1 font-sans text-small text-quiet">
        {name}
        {where && `, ${where}`}
      </p>
      <Answers read={read} preview={preview} onRead={onRead} />
      {preview && preview.rows.length > 0 && <FirstRows preview={preview} marked={problem.place.line} />}
    </Notice>
  );
}

function FirstRows({ preview, marked }: { preview: CapturePreview; marked: number | undefined }) {
  return (
    <section aria-label="First rows of the file" className="mt-4 max-w-full overflow-x-auto border-t border-hairline pt-2">
      <table className="tabular text-hex">
        <tbody>
          {preview.rows.slice(0, 14).map((row) => (
            <tr key={row.line} className={row.line === marked ? "text-broken" : row.readings ? "" : "text-quiet"}>
              <th scope="row" className="pr-4 text-right font-normal text-quiet">
                {row.line}
              </th>
              {row.cells.slice(0, 10).map((cell, place) => (
                // biome-ignore lint/suspicious/noArrayIndexKey: cells have no identity but their column
                <td key={place} className="max-w-48 truncate pr-4">
                  {cell}
                </td>
              ))}
            </tr>
          ))}
        </tbody>
      </table>
    </section>
  );
}
