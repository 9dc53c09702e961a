"use client";

import { Field } from "@/components/ui/Field";
import { signUp } from "@/lib/server/auth/actions";
import { ActionForm } from "./ActionForm";
import { NewPasswordField } from "./NewPasswordField";

export function SignUpForm() {
  return (
    <ActionForm action={signUp} submit="Found the team">
      {({ fields, values }) => (
        <>
          <Field
            label="Team"
            name="team"
            autoComplete="organization"
            required
            maxLength={120}
            hint="Cases belong to the team; you can invite the others afterwards."
            defaultValue={values.team}
            error={fields.team}
          />
          <Field
            label="Your name"
            name="name"
            autoComplete="name"
            required
            maxLength={120}
            defaultValue={values.name}
            error={fields.name}
          />
          <Field
            label="E-mail"
            name="email"
            type="email"
            autoComplete="username"
            required
            defaultValue={values.email}
            error={fields.email}
          />
          <NewPasswordField error={fields.password} />
        </>
      )}
    </ActionForm>
  );
}
