import type { ButtonHTMLAttributes } from "react";

const LOOKS = {
  /** The one main action of a form or a step. */
  solid: "border border-ink bg-ink px-4 py-1.5 text-paper hover:bg-ink/85",
  /** Any other action that stands alone. */
  line: "border border-field bg-transparent px-4 py-1.5 text-ink hover:border-ink",
  /** An action inside text or a row of words. */
  word: "border-b border-field pb-px text-ink hover:border-ink",
  /** Something that cannot be taken back. */
  danger: "border border-broken bg-transparent px-4 py-1.5 text-broken hover:bg-broken/10",
} as const;

export interface ButtonProps extends ButtonHTMLAttributes<HTMLButtonElement> {
  look?: keyof typeof LOOKS;
  /** Shows that the action runs and keeps it from being started twice. */
  busy?: boolean;
}

/** The classes alone, for a link that reads as a button. */
export function buttonClass(look: keyof typeof LOOKS = "line"): string {
  return `inline-flex items-center gap-2 font-sans text-label no-underline disabled:opacity-50 ${LOOKS[look]}`;
}

export function Button({
  look = "line",
  busy = false,
  className = "",
  type = "button",
  disabled,
  children,
  ...rest
}: ButtonProps) {
  return (
    <button
      type={type}
      disabled={disabled || busy}
      aria-busy={busy || undefined}
      className={`${buttonClass(look)} ${className}`}
      {...rest}
    >
      {children}
      {busy && <span aria-hidden="true">…</span>}
    </button>
  );
}
