import "server-only";
import { createHash } from "node:crypto";
import { fork } from "./database";
import { Refusal } from "./http/problem";

const minute = 60;

/** Every limit of the product, most dangerous first: how often in a window of so many seconds, counted per subject. */
export const rules = {
  /** One caller guessing one account's password. */
  "sign-in": { max: 10, seconds: 15 * minute },
  /** One caller guessing at many accounts. */
  "sign-in-address": { max: 100, seconds: 15 * minute },
  /** Many callers guessing at one account. */
  "sign-in-account": { max: 100, seconds: 15 * minute },
  /** Guessing the current password from a stolen session. */
  "password-change": { max: 10, seconds: 15 * minute },
  "share-passphrase": { max: 20, seconds: 15 * minute },
  "reset-mail": { max: 5, seconds: 60 * minute },
  "reset-mail-address": { max: 30, seconds: 60 * minute },
  "reset-use": { max: 30, seconds: 60 * minute },
  invitation: { max: 60, seconds: 60 * minute },
  "invitation-use": { max: 30, seconds: 60 * minute },
  "sign-up": { max: 60, seconds: 60 * minute },
  /** Reads a whole capture again. */
  report: { max: 60, seconds: 5 * minute },
  write: { max: 1200, seconds: 5 * minute },
} as const satisfies Record<string, { max: number; seconds: number }>;

export type Rule = keyof typeof rules;

function keyOf(rule: Rule, subject: string): string {
  // Hashed, so that the table holds no addresses of people who merely mistyped.
  return `${rule}:${createHash("sha256").update(subject).digest("hex")}`;
}

/**
 * Counts one try and refuses it when the window is already full. One statement, so tries in parallel and on other
 * copies of the application are counted too; outside any transaction of the caller, so a rollback forgets nothing.
 */
export async function strike(rule: Rule, subject: string): Promise<void> {
  const { max, seconds } = rules[rule];
  const connection = (await fork()).getConnection();
  const rows: { count: number; wait: number }[] = await connection.execute(
    `insert into throttles as t (key, count, ends_at) values (?, 1, now() + make_interval(secs => ?))
     on conflict (key) do update set
       count = case when t.ends_at <= now() then 1 else t.count + 1 end,
       ends_at = case when t.ends_at <= now() then excluded.ends_at else t.ends_at end
     returning count, ceil(extract(epoch from ends_at - now()))::int as wait`,
    [keyOf(rule, subject), seconds],
  );
  const [row] = rows;
  if (row.count === 1) await connection.execute("delete from throttles where ends_at < now() - interval '1 hour'");
  if (row.count > max) {
    const minutes = Math.max(1, Math.ceil(row.wait / minute));
    throw new Refusal("too-many", {
      detail: rule,
      retryAfter: Math.max(1, row.wait),
      words: `Too many tries. Try again in ${minutes} ${minutes === 1 ? "minute" : "minutes"}.`,
    });
  }
}

/** Takes one counted try back: it turned out to be the rightful person. */
export async function forgive(rule: Rule, subject: string): Promise<void> {
  const connection = (await fork()).getConnection();
  await connection.execute("update throttles set count = greatest(count - 1, 0) where key = ?", [keyOf(rule, subject)]);
}

/** Empties a window: the rightful person is in, earlier mistakes no longer matter. */
export async function forget(rule: Rule, subject: string): Promise<void> {
  const connection = (await fork()).getConnection();
  await connection.execute("delete from throttles where key = ?", [keyOf(rule, subject)]);
}
