import { Field } from "@/components/ui/Field";

export function NewPasswordField({
  name = "password",
  label = "Password",
  error,
}: {
  name?: string;
  label?: string;
  error?: string;
}) {
  return (
    <Field
      label={label}
      name={name}
      type="password"
      autoComplete="new-password"
      required
      minLength={10}
      maxLength={200}
      hint="At least 10 characters; a short sentence is good."
      error={error}
    />
  );
}
