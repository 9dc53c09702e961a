"use client";

import { type ReactNode, useActionState, useEffect, useRef } from "react";
import { Button, type ButtonProps } from "@/components/ui/Button";
import { type FormState, idle } from "@/lib/case/form";

export type FormAction = (before: FormState, form: FormData) => Promise<FormState>;

export interface ActionFormProps {
  action: FormAction;
  /** Fields, given what the last submission answered. */
  children?: (state: FormState) => ReactNode;
  submit: string;
  look?: ButtonProps["look"];
  /** Values that travel along unseen. */
  hidden?: Readonly<Record<string, string | undefined>>;
  /** Fields and button on one line, for rows of a table. */
  inline?: boolean;
  /** Names the form where several stand on a page. */
  label?: string;
  /** Spoken name of the button where its word alone is not enough. */
  submitLabel?: string;
}

/** A form around a server action: works before any script has loaded, says its answer in a live region, keeps what was typed. */
export function ActionForm({
  action,
  children,
  submit,
  look = "solid",
  hidden = {},
  inline = false,
  label,
  submitLabel,
}: ActionFormProps) {
  const [state, run, busy] = useActionState(action, idle);
  const form = useRef<HTMLFormElement>(null);

  useEffect(() => {
    if (state.status === "refused") form.current?.querySelector<HTMLElement>('[aria-invalid="true"]')?.focus();
  }, [state]);

  return (
    <form
      ref={form}
      action={run}
      aria-label={label}
      noValidate
      className={inline ? "inline-flex flex-wrap items-baseline gap-3" : "grid gap-5"}
    >
      {Object.entries(hidden).map(
        ([name, value]) => value !== undefined && <input key={name} type="hidden" name={name} value={value} />,
      )}
      {children?.(state)}
      <div className={inline ? "contents" : "flex flex-wrap items-baseline gap-4"}>
        <Button type="submit" look={look} busy={busy} aria-label={submitLabel}>
          {submit}
        </Button>
        <Answer state={state} inline={inline} />
      </div>
    </form>
  );
}

function Answer({ state, inline }: { state: FormState; inline: boolean }) {
  const refused = state.status === "refused";
  // The live region has to be there before there is something to say; unseen, it takes back the gap it would make.
  const gap = inline && !state.message ? "-ml-3" : "";
  return (
    <p aria-live="polite" className={`font-sans text-small ${gap} ${refused ? "text-broken" : "text-quiet"}`}>
      {state.message && `${refused ? "× " : ""}${state.message}`}
    </p>
  );
}
