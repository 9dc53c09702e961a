import { type SelectHTMLAttributes, useId } from "react";
import { entryClass } from "./Field";

export interface SelectProps extends SelectHTMLAttributes<HTMLSelectElement> {
  label: string;
  options: readonly { readonly value: string; readonly text: string }[];
  /** Label and list on one line, for rows of settings. */
  inline?: boolean;
}

/** The platform's own list: right on a phone, with the keyboard and for a screen reader without any help from us. */
export function Select({ label, options, inline = false, id, className = "", ...rest }: SelectProps) {
  const made = useId();
  const own = id ?? made;
  return (
    <div className={`font-sans ${inline ? "inline-flex items-baseline gap-2" : ""}`}>
      <label htmlFor={own} className="text-label text-quiet">
        {label}
      </label>
      <select
        id={own}
        className={`${entryClass} ${inline ? "w-auto py-0.5 text-label" : ""} [&>option]:bg-paper ${className}`}
        {...rest}
      >
        {options.map((option) => (
          <option key={option.value} value={option.value}>
            {option.text}
          </option>
        ))}
      </select>
    </div>
  );
}
