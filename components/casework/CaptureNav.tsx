import { wordClass } from "@/components/ui/Tabs";
import type { Item } from "./items";

export interface CaptureNavProps {
  items: readonly Pick<Item, "key" | "name">[];
  current: Pick<Item, "key"> | null;
  onChoose: (ordinal: number) => void;
}

/** The captures of a case, as words in a row. */
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
        </button>
      ))}
    </nav>
  );
}
