// In: a folder. Out: a mail server on loopback that keeps every message as a file and delivers none, with a page to read them.

import { randomUUID } from "node:crypto";
import { mkdir, readdir, readFile, rename, rm, writeFile } from "node:fs/promises";
import http, { type IncomingMessage, type ServerResponse } from "node:http";
import path from "node:path";
import { type AddressObject, type ParsedMail, simpleParser } from "mailparser";
import { SMTPServer } from "smtp-server";
import { listen } from "./storage";
import { escapeXml } from "./storage-xml";

export interface MailboxWish {
  readonly folder: string;
  readonly smtpPort: number;
  readonly webPort: number;
}

export interface Mailbox {
  /** For SMTP_URL. */
  readonly url: string;
  /** Where people and tests read what was sent. */
  readonly address: string;
  stop(): Promise<void>;
}

/** One message as the listing shows it, newest first. */
interface Letter {
  readonly id: string;
  readonly to: string;
  readonly from: string;
  readonly subject: string;
  readonly text: string;
  readonly date: string;
}

const LARGEST = 20_000_000;

export async function startMailbox(wish: MailboxWish): Promise<Mailbox> {
  await mkdir(wish.folder, { recursive: true });
  const smtp = new SMTPServer({
    disabledCommands: ["STARTTLS", "AUTH"],
    logger: false,
    size: LARGEST,
    onData(stream, _session, done) {
      const pieces: Buffer[] = [];
      stream.on("data", (piece: Buffer) => pieces.push(piece));
      stream.on("end", () => {
        if (stream.sizeExceeded) return done(new Error("552 The message is too long"));
        keep(wish.folder, Buffer.concat(pieces)).then(
          () => done(),
          (error) => done(error instanceof Error ? error : new Error(String(error))),
        );
      });
    },
  });
  // A client that hangs up in the middle is its own affair.
  smtp.on("error", () => undefined);
  await new Promise<void>((resolve, reject) => {
    smtp.server.once("error", reject);
    smtp.listen(wish.smtpPort, "127.0.0.1", resolve);
  });
  const hosts = [`127.0.0.1:${wish.webPort}`, `localhost:${wish.webPort}`];
  const web = http.createServer((request, response) => {
    show(request, response, wish.folder, hosts).catch((error) => {
      response.writeHead(500, { "Content-Type": "text/plain; charset=utf-8" });
      response.end(String(error));
    });
  });
  await listen(web, wish.webPort);
  return {
    url: `smtp://127.0.0.1:${wish.smtpPort}`,
    address: `http://127.0.0.1:${wish.webPort}`,
    async stop() {
      web.closeAllConnections();
      await Promise.all([
        new Promise<void>((resolve) => smtp.close(() => resolve())),
        new Promise<void>((resolve) => web.close(() => resolve())),
      ]);
    },
  };
}

/** The name sorts by time, so the folder itself is readable: 2026-12-01T10-20-30.123Z-1a2b.eml */
async function keep(folder: string, message: Buffer): Promise<void> {
  const name = `${new Date().toISOString().replaceAll(":", "-")}-${randomUUID().slice(0, 4)}.eml`;
  await writeFile(path.join(folder, `${name}.part`), message);
  await rename(path.join(folder, `${name}.part`), path.join(folder, name));
}

async function letterIds(folder: string): Promise<string[]> {
  return (await readdir(folder))
    .filter((name) => name.endsWith(".eml"))
    .sort()
    .reverse();
}

async function readLetter(folder: string, id: string): Promise<Letter> {
  const mail = await simpleParser(await readFile(path.join(folder, id)));
  return {
    id,
    to: addresses(mail.to),
    from: addresses(mail.from),
    subject: mail.subject ?? "",
    text: mail.text ?? "",
    date: dateOf(mail),
  };
}

function addresses(value: AddressObject | AddressObject[] | undefined): string {
  return [value ?? []]
    .flat()
    .map((one) => one.text)
    .join(", ");
}

function dateOf(mail: ParsedMail): string {
  return (mail.date ?? new Date(0)).toISOString();
}

/**
 * GET / for people; GET /messages.json?to=ADDRESS for tests (newest first); GET /messages/ID the raw file; DELETE /messages.json empties it.
 * Only asked by its own name, so that a page elsewhere cannot reach it through a name of its own.
 */
async function show(request: IncomingMessage, response: ServerResponse, folder: string, hosts: readonly string[]): Promise<void> {
  const url = new URL(request.url ?? "/", "http://localhost");
  const send = (status: number, type: string, body: string | Buffer) => {
    response.writeHead(status, {
      "Content-Type": `${type}; charset=utf-8`,
      "Cache-Control": "no-store",
      "Content-Security-Policy": "default-src 'none'",
    });
    response.end(body);
  };
  if (!hosts.includes(request.headers.host ?? ""))
    return send(421, "text/plain", "This mailbox answers only by its own address.");
  const ids = await letterIds(folder);
  const raw = /^\/messages\/([^/]+)$/.exec(url.pathname)?.[1];
  if (url.pathname === "/messages.json" && request.method === "DELETE") {
    for (const id of ids) await rm(path.join(folder, id), { force: true });
    return send(200, "application/json", "[]");
  }
  if (request.method !== "GET") return send(405, "text/plain", "Only reading.");
  if (raw !== undefined && ids.includes(raw)) return send(200, "text/plain", await readFile(path.join(folder, raw)));
  if (url.pathname !== "/" && url.pathname !== "/messages.json") return send(404, "text/plain", "There is no such message.");
  const letters = await Promise.all(ids.slice(0, 200).map((id) => readLetter(folder, id)));
  const wanted = url.searchParams.get("to")?.toLowerCase();
  const shown = wanted ? letters.filter((letter) => letter.to.toLowerCase().includes(wanted)) : letters;
  if (url.pathname === "/messages.json") return send(200, "application/json", JSON.stringify(shown));
  return send(200, "text/html", page(shown));
}

function page(letters: readonly Letter[]): string {
  const items = letters.map((letter) => {
    const text = escapeXml(letter.text).replace(
      /https?:\/\/[^\s<&]+(?:&amp;[^\s<&]+)*/g,
      (link) => `<a href="${link}">${link}</a>`,
    );
    const head = `${escapeXml(letter.date)} to ${escapeXml(letter.to)}`;
    return `<article><h2>${escapeXml(letter.subject)}</h2><p>${head} (<a href="/messages/${encodeURIComponent(letter.id)}">raw</a>)</p><pre>${text}</pre></article>`;
  });
  const body = items.length ? items.join("\n") : "<p>No mail yet.</p>";
  return `<!doctype html><html lang="en"><meta charset="utf-8"><title>Firstlow: mail kept here</title><h1>Mail kept here, delivered nowhere</h1>${body}</html>`;
}
