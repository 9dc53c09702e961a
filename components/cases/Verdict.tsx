import { FaultShape, Tick, UndecidedShape } from "@/components/ui/Icon";

const looks = {
  pass: { shape: <Tick />, words: "within limits", tone: "" },
  fail: { shape: <FaultShape />, words: "failed", tone: "text-broken" },
  undecided: { shape: <UndecidedShape />, words: "undecided", tone: "" },
} as const;

/** A verdict as shape and word, never by colour alone. */
export function Verdict({ verdict }: { verdict: keyof typeof looks | null }) {
  if (verdict === null) return <span className="text-quiet">not decoded yet</span>;
  const { shape, words, tone } = looks[verdict];
  return (
    <span className={`inline-flex items-baseline gap-1.5 ${tone}`}>
      {shape}
      {words}
    </span>
  );
}
