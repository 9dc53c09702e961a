import { useMemo } from "react";
import { MarginHead } from "@/components/margin/MarginHead";
import type { Capture } from "@/lib/view/capture";
import { address, addressBytes, count, duration, volts } from "@/lib/view/format";

export interface BusPartProps {
  capture: Capture;
  /** Changes when the list may. */
  version: unknown;
  names: ReadonlyMap<number, string>;
  onAddress: (address: number) => void;
}

const LISTED = 24;

/** Who is on this bus: controllers by their habits, targets by their addresses. */
export function BusPart({ capture, version, names, onAddress }: BusPartProps) {
  const controllers = capture.summary?.controllers ?? [];
  // biome-ignore lint/correctness/useExhaustiveDependencies: the capture grows in place, the version says when
  const seen = useMemo(() => capture.ledger.addresses, [capture, version]);
  if (seen.length === 0 && controllers.length === 0) return null;
  return (
    <section>
      <MarginHead>On this bus</MarginHead>
      <ul className="mt-2 space-y-1.5 font-sans text-label">
        {controllers.map((controller) => (
          <li key={controller.id}>
            <span className="font-serif text-body">{controller.name ?? `controller ${controller.id}`}</span>
            <span className="float-right tabular text-hex">{count(controller.transactions)}</span>
            <span className="block text-small text-quiet">
              {[
                controller.tlow_s === null ? "" : `SCL low ${duration(controller.tlow_s)}`,
                controller.thigh_s === null ? "" : `high ${duration(controller.thigh_s)}`,
                controller.vol_v === null ? "" : `pulls to ${volts(controller.vol_v)}`,
              ]
                .filter(Boolean)
                .join(", ")}
            </span>
          </li>
        ))}
      </ul>
      <ul className="mt-3 font-sans text-label">
        {seen.slice(0, LISTED).map((entry) => (
          <li key={entry.address}>
            <button
              type="button"
              onClick={() => onAddress(entry.address)}
              className="grid min-h-6 w-full grid-cols-[3.2rem_4rem_1fr_auto] items-baseline text-left hover:text-accent"
            >
              <span className="tabular text-hex">{address(entry.address, entry.bits)}</span>
              <span className="tabular text-[0.75rem] text-quiet">{addressBytes(entry.address, entry.bits)}</span>
              <span className="truncate">{names.get(entry.address) ?? ""}</span>
              <span className="tabular text-hex">{count(entry.count)}</span>
            </button>
          </li>
        ))}
      </ul>
      {seen.length > LISTED && (
        <p className="font-sans text-small text-quiet">and {count(seen.length - LISTED)} more addresses</p>
      )}
    </section>
  );
}
