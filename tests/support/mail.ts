import { mkdtemp, rm } from "node:fs/promises";
import { createServer } from "node:net";
import { tmpdir } from "node:os";
import path from "node:path";
import { startMailbox } from "@/workers/stack/mailbox";

export interface Mail {
  readonly to: string;
  readonly from: string;
  readonly subject: string;
  readonly text: string;
}

export interface TestMailbox {
  /** What has come in for an address, newest first. */
  read(to: string): Promise<Mail[]>;
  /** The secret at the end of the newest letter's link below `path`. */
  token(to: string, path: string): Promise<string>;
  close(): Promise<void>;
}

/** A mail server of the test's own; settings point at it, so open it before anything reads them. */
export async function openMailbox(): Promise<TestMailbox> {
  const folder = await mkdtemp(path.join(tmpdir(), "firstlow-mail-"));
  const box = await startMailbox({ folder, smtpPort: await freePort(), webPort: await freePort() });
  process.env.SMTP_URL = box.url;
  const read = async (to: string): Promise<Mail[]> => {
    const answer = await fetch(`${box.address}/messages.json?to=${encodeURIComponent(to)}`);
    return (await answer.json()) as Mail[];
  };
  return {
    read,
    async token(to, below) {
      const [letter] = await read(to);
      const found = letter && new RegExp(`${below}/([A-Za-z0-9_-]{43})\\b`).exec(letter.text)?.[1];
      if (!found) throw new Error(`no letter to ${to} with a link below ${below}`);
      return found;
    },
    async close() {
      await box.stop();
      await rm(folder, { recursive: true, force: true });
    },
  };
}

function freePort(): Promise<number> {
  return new Promise((resolve, reject) => {
    const server = createServer();
    server.once("error", reject);
    server.listen(0, "127.0.0.1", () => {
      const address = server.address();
      server.close(() => (address && typeof address === "object" ? resolve(address.port) : reject(new Error("no port"))));
    });
  });
}
