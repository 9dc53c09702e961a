// The test function of every browser test: a page that complains fails the test, whatever else the test looks at.

import { test as base, type ConsoleMessage, expect, type Page } from "@playwright/test";

interface Complaints {
  /** Lets one expected complaint pass, for tests of errors: a piece of the console text or of the failed address. */
  expectComplaint(piece: string | RegExp): void;
}

interface Watch extends Complaints {
  readonly heard: string[];
  watch(page: Page): void;
}

export const test = base.extend<{ complaints: Complaints }>({
  complaints: [
    async ({ context }, use) => {
      const watch = startWatch();
      for (const page of context.pages()) watch.watch(page);
      context.on("page", (page) => watch.watch(page));
      await use(watch);
      expect(watch.heard, "errors in the console or thrown on the page").toEqual([]);
    },
    { auto: true },
  ],
});

function startWatch(): Watch {
  const allowed: (string | RegExp)[] = [];
  const heard: string[] = [];
  const hear = (text: string) => {
    if (!allowed.some((piece) => (typeof piece === "string" ? text.includes(piece) : piece.test(text)))) heard.push(text);
  };
  return {
    heard,
    expectComplaint: (piece) => void allowed.push(piece),
    watch(page) {
      page.on("pageerror", (error) => hear(`thrown: ${error.message}`));
      page.on("console", (message: ConsoleMessage) => {
        if (message.type() === "error" || message.type() === "warning")
          hear(`${message.type()}: ${message.text()} (${message.location().url})`);
      });
    },
  };
}

export { expect } from "@playwright/test";
