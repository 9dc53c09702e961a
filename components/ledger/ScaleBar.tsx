import type { Timebase } from "@/lib/base/time";
import { duration, span } from "@/lib/view/format";
import { scaleBar } from "@/lib/view/scale";

export interface ScaleBarProps {
  ticksPerPixel: number;
  timebase: Timebase;
  onZoom: (factor: number) => void;
  onFit: () => void;
}

/** The one length that holds for every row, and the words that change it. */
export function ScaleBar({ ticksPerPixel, timebase, onZoom, onFit }: ScaleBarProps) {
  const bar = scaleBar(ticksPerPixel, timebase, 110);
  const words = timebase.origin === "assumed" ? span(bar.seconds, timebase) : duration(bar.seconds);
  return (
    <div className="flex items-center gap-2 whitespace-nowrap font-sans text-label text-quiet">
      <button type="button" onClick={() => onZoom(1.4)} aria-label="Show more time in a row" className="px-1 hover:text-ink">
        −
      </button>
      <button type="button" onClick={onFit} className="hover:text-ink" title="Fit the usual rows">
        one scale: {words}
      </button>
      <svg width={Math.ceil(bar.width) + 2} height="11" aria-hidden="true" className="text-quiet">
        <path d={`M1 1V10M1 5.5H${bar.width + 1}M${bar.width + 1} 1V10`} fill="none" stroke="currentColor" />
      </svg>
      <button type="button" onClick={() => onZoom(1 / 1.4)} aria-label="Look nearer at every row" className="px-1 hover:text-ink">
        +
      </button>
    </div>
  );
}
