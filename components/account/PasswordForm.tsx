"use client";

import { Field } from "@/components/ui/Field";
import { changePassword } from "@/lib/server/auth/actions";
import { ActionForm } from "./ActionForm";
import { NewPasswordField } from "./NewPasswordField";

/** `email` goes along unseen, so that a password manager knows whose password changes. */
export function PasswordForm({ email }: { email: string }) {
  return (
    <ActionForm action={changePassword} submit="Change the password" look="line" label="Password">
      {({ fields }) => (
        <>
          <input type="text" name="username" autoComplete="username" defaultValue={email} readOnly hidden />
          <Field
            label="Current password"
            name="currentPassword"
            type="password"
            autoComplete="current-password"
            required
            error={fields.currentPassword}
          />
          <NewPasswordField name="newPassword" label="New password" error={fields.newPassword} />
        </>
      )}
    </ActionForm>
  );
}
