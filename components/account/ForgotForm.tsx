"use client";

import { Field } from "@/components/ui/Field";
import { forgot } from "@/lib/server/auth/actions";
import { ActionForm } from "./ActionForm";

export function ForgotForm() {
  return (
    <ActionForm action={forgot} submit="Mail me a link">
      {({ fields, values }) => (
        <Field
          label="E-mail"
          name="email"
          type="email"
          autoComplete="username"
          required
          defaultValue={values.email}
          error={fields.email}
        />
      )}
    </ActionForm>
  );
}
