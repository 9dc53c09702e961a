// In: what a form's action answered. Out: the state a form shows. Shared by server and page, so no server words.

/** State of one form between two submissions. */
export interface FormState {
  readonly status: "idle" | "done" | "refused";
  /** Stable code of a refusal; programs read the code, people the message. */
  readonly code?: string;
  /** One or two sentences for the person; empty when idle. */
  readonly message: string;
  /** Messages beside the fields they are about. */
  readonly fields: Readonly<Record<string, string>>;
  /** What was typed, given back after a refusal; never a password. */
  readonly values: Readonly<Record<string, string>>;
}

export const idle: FormState = { status: "idle", message: "", fields: {}, values: {} };
