"use client";

import { Field } from "@/components/ui/Field";
import { signIn } from "@/lib/server/auth/actions";
import { ActionForm } from "./ActionForm";

/** `next` is where to go afterwards; `email` fills the field for somebody who comes from an invitation. */
export function SignInForm({ next, email }: { next?: string; email?: string }) {
  return (
    <ActionForm action={signIn} submit="Sign in" hidden={{ next }}>
      {({ fields, values }) => (
        <>
          <Field
            label="E-mail"
            name="email"
            type="email"
            autoComplete="username"
            required
            defaultValue={values.email ?? email}
            error={fields.email}
          />
          <Field
            label="Password"
            name="password"
            type="password"
            autoComplete="current-password"
            required
            error={fields.password}
          />
        </>
      )}
    </ActionForm>
  );
}
