// In: nothing. Out: a failure that a person can act on. Anything else that is thrown here is our own fault and shows its stack.

/** What is wrong, in one sentence, and what to do about it. Printed without a stack trace. */
export class Complaint extends Error {
  readonly advice: string;

  constructor(message: string, advice: string) {
    super(message);
    this.name = "Complaint";
    this.advice = advice;
  }
}

/** The `code` of a system error ("ENOSPC", "EACCES"), or undefined. */
export function systemCode(error: unknown): string | undefined {
  if (error instanceof Error && "code" in error && typeof error.code === "string") return error.code;
  return undefined;
}

/** Prints a failure for people: a complaint as its two sentences, known system errors in words, anything else with its stack. */
export function complain(error: unknown): void {
  const known = error instanceof Complaint ? error : translate(error);
  if (known) {
    console.error(`\n${known.message}\n${known.advice}`);
    return;
  }
  console.error(error instanceof Error ? error.stack : error);
}

function translate(error: unknown): Complaint | undefined {
  const code = systemCode(error);
  const message = error instanceof Error ? error.message : String(error);
  if (code === "ENOSPC" || code === "EDQUOT") {
    return new Complaint(
      `The disk is full (${message}).`,
      "Free some space (about 1 GB is comfortable) and start again; nothing saved so far is lost.",
    );
  }
  if (code === "EACCES" || code === "EPERM" || code === "EROFS") {
    return new Complaint(
      `This user may not do that here (${message}).`,
      "Run the command as the user who owns this folder, or give the folder back to that user with chown.",
    );
  }
  return undefined;
}
