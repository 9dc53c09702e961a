import { codesIn } from "@/lib/diagnosis/codes";

/** What the codes and flags of a controller log stand for on the wires; nothing where it names none. */
export function CodeMeanings({ messages }: { messages: readonly string[] }) {
  const codes = codesIn(messages);
  if (codes.length === 0) return null;
  return (
    <dl className="mt-1 grid grid-cols-[auto_minmax(0,1fr)] gap-x-3 font-serif text-body">
      {codes.map(({ code, meaning, source }) => (
        <div key={code} className="contents">
          <dt className="tabular text-hex leading-6">{code}</dt>
          <dd>
            {meaning} <span className="font-sans text-small text-quiet">({source})</span>
          </dd>
        </div>
      ))}
    </dl>
  );
}
