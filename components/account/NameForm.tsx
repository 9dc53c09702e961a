"use client";

import { Field } from "@/components/ui/Field";
import { ActionForm, type FormAction } from "./ActionForm";

/** One name and its button: a person's, a team's. */
export function NameForm({ action, label, name, submit }: { action: FormAction; label: string; name: string; submit: string }) {
  return (
    <ActionForm action={action} submit={submit} look="line" label={label}>
      {({ fields, values }) => (
        <Field
          label={label}
          name="name"
          required
          maxLength={120}
          autoComplete="off"
          defaultValue={values.name ?? name}
          error={fields.name}
        />
      )}
    </ActionForm>
  );
}
