"use client";

import { reset } from "@/lib/server/auth/actions";
import { ActionForm } from "./ActionForm";
import { NewPasswordField } from "./NewPasswordField";

export function ResetForm({ token }: { token: string }) {
  return (
    <ActionForm action={reset} submit="Set the password" hidden={{ token }}>
      {({ fields }) => <NewPasswordField label="New password" error={fields.password} />}
    </ActionForm>
  );
}
