// What the application has sent, read from the mailbox that the test command started.

import { expect } from "@playwright/test";

export interface Letter {
  readonly to: string;
  readonly subject: string;
  readonly text: string;
}

/** The newest letter to an address; waits until there is one. */
export async function letterTo(address: string): Promise<Letter> {
  let newest: Letter | undefined;
  await expect(async () => {
    const answer = await fetch(`${process.env.FIRSTLOW_MAILBOX}/messages.json?to=${encodeURIComponent(address)}`);
    [newest] = (await answer.json()) as Letter[];
    expect(newest, `a letter to ${address}`).toBeDefined();
  }).toPass({ timeout: 15_000 });
  if (!newest) throw new Error(`There is no letter to ${address}.`);
  return newest;
}

/** The first link of a letter. */
export function linkIn(letter: Letter): string {
  const link = /https?:\/\/\S+/.exec(letter.text)?.[0];
  if (!link) throw new Error(`The letter "${letter.subject}" has no link.`);
  return link;
}
