import { type InputHTMLAttributes, type ReactNode, type TextareaHTMLAttributes, useId } from "react";

interface Frame {
  label: string;
  hint?: ReactNode;
  /** What is wrong with the present value, one sentence. */
  error?: string;
}

export const entryClass =
  "w-full border-0 border-b border-field bg-transparent px-0 py-1.5 font-sans text-body text-ink placeholder:text-quiet " +
  "hover:border-ink focus-visible:border-accent aria-[invalid=true]:border-broken";

function described(id: string, frame: Frame): string | undefined {
  const ids = [frame.hint ? `${id}-hint` : "", frame.error ? `${id}-error` : ""].filter(Boolean);
  return ids.length > 0 ? ids.join(" ") : undefined;
}

function Around({ id, label, hint, error, children }: Frame & { id: string; children: ReactNode }) {
  return (
    <div className="font-sans">
      <label htmlFor={id} className="block text-label text-quiet">
        {label}
      </label>
      {children}
      {hint && (
        <p id={`${id}-hint`} className="mt-1 text-small text-quiet">
          {hint}
        </p>
      )}
      <p id={`${id}-error`} aria-live="polite" className="text-small text-broken">
        {error && <span className="mt-1 block">× {error}</span>}
      </p>
    </div>
  );
}

export type FieldProps = Frame & InputHTMLAttributes<HTMLInputElement>;

export function Field({ label, hint, error, id, className = "", ...rest }: FieldProps) {
  const made = useId();
  const own = id ?? made;
  return (
    <Around id={own} label={label} hint={hint} error={error}>
      <input
        id={own}
        aria-invalid={error ? true : undefined}
        aria-describedby={described(own, { label, hint, error })}
        className={`${entryClass} ${className}`}
        {...rest}
      />
    </Around>
  );
}

export type TextFieldProps = Frame & TextareaHTMLAttributes<HTMLTextAreaElement>;

/** Several lines. */
export function TextField({ label, hint, error, id, className = "", rows = 3, ...rest }: TextFieldProps) {
  const made = useId();
  const own = id ?? made;
  return (
    <Around id={own} label={label} hint={hint} error={error}>
      <textarea
        id={own}
        rows={rows}
        aria-invalid={error ? true : undefined}
        aria-describedby={described(own, { label, hint, error })}
        className={`${entryClass} resize-y font-serif ${className}`}
        {...rest}
      />
    </Around>
  );
}
