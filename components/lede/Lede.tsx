import { Fragment } from "react";

export interface LedeProps {
  /** Plain sentences (Summary.lede). */
  sentences: readonly string[];
  onGo: (transaction: number) => void;
}

/** What happened, how bad, and where. Transactions that are named lead there. */
export function Lede({ sentences, onGo }: LedeProps) {
  return (
    <p className="max-w-[62rem] font-serif text-lede">
      {sentences.map((sentence) => (
        <Fragment key={sentence}>
          <Sentence text={sentence} onGo={onGo} />{" "}
        </Fragment>
      ))}
    </p>
  );
}

/** "transaction 213", and symbols and figures that read better in their own face: tSU;DAT, 43.4 µs, 0x50. */
const PARTS = /(\b[Tt]ransaction \d+|\bt[A-Z][\w;:()]*|\b0x[0-9A-F]+|[\d.,]+\s?(?:ps|ns|µs|ms|kHz|MHz|Hz|s|V)\b)/;

function Sentence({ text, onGo }: { text: string; onGo: (transaction: number) => void }) {
  return text.split(PARTS).map((part, place) => {
    const key = `${place}${part}`;
    const named = /^([Tt]ransaction) (\d+)$/.exec(part);
    if (named) {
      return (
        <Fragment key={key}>
          {named[1]}{" "}
          <button
            type="button"
            onClick={() => onGo(Number(named[2]))}
            className="border-b border-field font-semibold leading-[1.1] hover:border-ink"
          >
            {named[2]}
          </button>
        </Fragment>
      );
    }
    if (place % 2 === 0) return <Fragment key={key}>{part}</Fragment>;
    return (
      <span key={key} className="tabular whitespace-nowrap text-[0.84em]">
        {part}
      </span>
    );
  });
}
