import "server-only";
import type { Cookie } from "lucia";
import { refresh } from "next/cache";
import { cookies, headers } from "next/headers";
import { redirect } from "next/navigation";
import type { z } from "zod";
import type { FormState } from "@/lib/case/form";
import { lucia } from "@/lib/server/auth/lucia";
import { fork } from "@/lib/server/database";
import { type Caller, checkOrigin, readCaller } from "./caller";
import { type Admitted, admit, type Given, parse, type Rules } from "./entrance";
import { type Told, tell } from "./problem";

/** What a handler answers: where to go, or what to say; with a cookie to set where the session changed. */
interface Outcome {
  readonly to?: string;
  readonly message?: string;
  readonly cookie?: Cookie;
}

interface ActionDefinition<Who extends keyof Admitted, Input extends z.ZodType> extends Rules<Who> {
  /** Shape of the form. Repeated fields arrive as arrays, all others as strings. */
  readonly input: Input;
  readonly handle: (given: Given<Who, z.output<Input>>) => Promise<Outcome>;
}

type FormAction = (before: FormState, form: FormData) => Promise<FormState>;

/** Makes a form's server action. Every action of the product is made here; a guard test refuses any other. */
export function action<Who extends keyof Admitted, Input extends z.ZodType>(
  definition: ActionDefinition<Who, Input>,
): FormAction {
  return async (_before, form) => {
    const caller = readCaller(await headers());
    const raw = fieldsOf(form);
    let outcome: Outcome;
    try {
      outcome = await enter(definition, raw, caller);
    } catch (error) {
      return refused(tell(error, caller.requestId), raw, caller);
    }
    if (outcome.cookie) await setCookie(outcome.cookie);
    // Outside the try: redirecting works by throwing.
    if (outcome.to !== undefined) redirect(outcome.to);
    // The page behind the form shows what is true now.
    refresh();
    return { status: "done", message: outcome.message ?? "Saved.", fields: {}, values: {} };
  };
}

async function enter<Who extends keyof Admitted, Input extends z.ZodType>(
  definition: ActionDefinition<Who, Input>,
  raw: Fields,
  caller: Caller,
): Promise<Outcome> {
  checkOrigin(caller);
  const viewer = await admit(definition, caller);
  return definition.handle({ viewer, input: parse(definition.input, raw), caller, em: await fork() });
}

async function setCookie(cookie: Cookie): Promise<void> {
  (await cookies()).set(cookie.name, cookie.value, cookie.attributes);
}

async function refused(told: Told, raw: Fields, caller: Caller): Promise<FormState> {
  // A cookie whose session has ended is taken off the browser, or it would be sent for ever.
  if (told.code === "signed-out" && lucia().readSessionCookie(caller.cookie)) await setCookie(lucia().createBlankSessionCookie());
  const message = told.code === "internal" ? `${told.message} Request ${told.requestId}.` : told.message;
  return { status: "refused", code: told.code, message, fields: told.fields, values: typedText(raw) };
}

type Fields = Readonly<Record<string, FormDataEntryValue | FormDataEntryValue[]>>;

/** Form fields by name, without those the framework adds for itself. */
function fieldsOf(form: FormData): Fields {
  const names = [...new Set(form.keys())].filter((name) => !name.startsWith("$ACTION_"));
  return Object.fromEntries(
    names.map((name) => {
      const all = form.getAll(name);
      return [name, all.length === 1 ? all[0] : all];
    }),
  );
}

function typedText(raw: Fields): Record<string, string> {
  const kept: Record<string, string> = {};
  for (const [name, value] of Object.entries(raw)) {
    if (typeof value === "string" && !/pass(word|phrase)|token/i.test(name)) kept[name] = value;
  }
  return kept;
}
