import type { ReactNode } from "react";
import { FaultShape, UndecidedShape } from "./Icon";

const KINDS = {
  note: { edge: "border-field", tone: "text-quiet", shape: null },
  warning: { edge: "border-ink", tone: "text-ink", shape: <UndecidedShape /> },
  broken: { edge: "border-broken", tone: "text-broken", shape: <FaultShape /> },
} as const;

export interface NoticeProps {
  kind?: keyof typeof KINDS;
  title?: string;
  children?: ReactNode;
  /** What can be done about it: buttons or links. */
  actions?: ReactNode;
}

/** A statement set between two hairlines. A broken one is announced at once, the others politely. */
export function Notice({ kind = "note", title, children, actions }: NoticeProps) {
  const { edge, tone, shape } = KINDS[kind];
  return (
    <div role={kind === "broken" ? "alert" : "status"} className={`border-y py-3 ${edge}`}>
      {title && (
        <p className={`flex items-baseline gap-2 font-serif text-[1.0625rem] font-semibold ${tone}`}>
          {shape}
          {title}
        </p>
      )}
      {children && <div className="mt-1 max-w-[68ch] font-serif text-body text-ink">{children}</div>}
      {actions && <div className="mt-3 flex flex-wrap gap-4">{actions}</div>}
    </div>
  );
}
