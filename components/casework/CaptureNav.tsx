import { wordClass } from "@/components/ui/Tabs";
import type { Summary } from "@/lib/diagnosis/report";
import { CAPTURE_WORDS } from "@/lib/view/words";
import type { Item } from "./items";

type Verdict = Summary["verdict"];

export interface CaptureNavProps {
  items: readonly (Pick<Item, "key" | "name"> & { readonly verdict: Verdict | null })[];
  current: Pick<Item, "key"> | null;
  onChoose: (ordinal: number) => void;
}

/** The captures of a case, as words in a row, each with how it was judged: which of forty fails is seen without opening them. */
export function CaptureNav({ items, current, onChoose }: CaptureNavProps) {
  return (
    <nav aria-label="Captures of this case" className="flex flex-wrap gap-x-6 gap-y-1">
      {items.map((item, place) => (
        <button
          key={item.key}
          type="button"
          aria-pressed={item.key === current?.key}
          onClick={() => onChoose(place + 1)}
          className={`tabular text-hex ${wordClass}`}
        >
          {item.name}
          {item.verdict !== null && (
            <span className={`ml-1.5 font-serif italic ${item.verdict === "fail" ? "text-broken" : "text-quiet"}`}>
              {CAPTURE_WORDS[item.verdict]}
            </span>
          )}
        </button>
      ))}
    </nav>
  );
}
