"use client";

import { Field } from "@/components/ui/Field";
import { join, joinNew } from "@/lib/server/team/actions";
import { ActionForm } from "./ActionForm";
import { NewPasswordField } from "./NewPasswordField";

/** Accepts an invitation as somebody new. */
export function JoinNewForm({ token, email }: { token: string; email: string }) {
  return (
    <ActionForm action={joinNew} submit="Join the team" hidden={{ token }}>
      {({ fields, values }) => (
        <>
          <Field label="E-mail" name="email" type="email" autoComplete="username" readOnly value={email} error={fields.email} />
          <Field
            label="Your name"
            name="name"
            autoComplete="name"
            required
            maxLength={120}
            defaultValue={values.name}
            error={fields.name}
          />
          <NewPasswordField error={fields.password} />
        </>
      )}
    </ActionForm>
  );
}

/** Accepts an invitation as the person who is signed in. */
export function JoinForm({ token }: { token: string }) {
  return <ActionForm action={join} submit="Join the team" hidden={{ token }} />;
}
