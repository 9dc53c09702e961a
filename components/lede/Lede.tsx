import type { Summary } from "@/lib/diagnosis/report";
import { lede } from "@/lib/view/lede";

export interface LedeProps {
  summary: Summary;
  onGo: (transaction: number) => void;
}

/** What happened, how bad, and where, in plain sentences. */
export function Lede({ summary, onGo }: LedeProps) {
  return (
    <p className="max-w-[62rem] font-serif text-lede">
      {lede(summary).map((piece, place) => {
        const key = `${place}${piece.text}`;
        if (piece.kind === "strong") return <strong key={key}>{piece.text}</strong>;
        if (piece.kind === "mono")
          return (
            <span key={key} className="tabular text-[0.85em]">
              {piece.text}
            </span>
          );
        const { transaction } = piece;
        if (piece.kind !== "row" || transaction === undefined) return <span key={key}>{piece.text}</span>;
        return (
          <button
            key={key}
            type="button"
            onClick={() => onGo(transaction)}
            className="border-b border-field font-semibold leading-[1.1] hover:border-ink"
          >
            {piece.text}
          </button>
        );
      })}
    </p>
  );
}
