import type { ReactNode } from "react";

/** Heading of one part of the margin: italic over a rule. */
export function MarginHead({ children, aside }: { children: ReactNode; aside?: ReactNode }) {
  return (
    <div className="flex items-baseline justify-between border-b border-ink">
      <h2 className="font-serif text-[1.0625rem] italic leading-7">{children}</h2>
      {aside && <span className="font-sans text-small text-quiet">{aside}</span>}
    </div>
  );
}
