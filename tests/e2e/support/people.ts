// The demo team in the browser: one account of each role, as the start command prints them.

import { type Browser, type BrowserContext, expect, type Page } from "@playwright/test";
import type { DemoAccount } from "@/workers/stack/application";

/** The account of a role; the seed decides address and password, so tests know neither. */
export function account(role: string): DemoAccount {
  const accounts: DemoAccount[] = JSON.parse(process.env.FIRSTLOW_ACCOUNTS ?? "[]");
  const found = accounts.find((one) => one.role === role);
  if (!found) throw new Error(`The seed made no account for the role "${role}".`);
  return found;
}

/** Signs in through the form, as a person does; ends on the list of cases. */
export async function signIn(page: Page, role: string): Promise<void> {
  const { email, password } = account(role);
  await page.goto("/sign-in");
  await page.getByLabel("E-mail").fill(email);
  await page.getByLabel("Password").fill(password);
  await page.getByRole("button", { name: "Sign in" }).click();
  await expect(page).toHaveURL(/\/cases/);
}

/** A browser that shares nothing with the test's own: no session, no storage. The caller closes it. */
export function stranger(browser: Browser): Promise<BrowserContext> {
  return browser.newContext({ baseURL: process.env.FIRSTLOW_ADDRESS });
}
