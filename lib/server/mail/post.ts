import "server-only";
import { createTransport, type Transporter } from "nodemailer";
import { Refusal } from "@/lib/server/http/problem";
import { settings } from "@/lib/server/settings";
import type { Letter } from "./letters";

let transport: Transporter | undefined;

/** Sends a letter and waits until the mail server has taken it; throws "mail-failed". */
export async function post(letter: Letter): Promise<void> {
  const { url, from } = settings().mail;
  transport ??= createTransport({ url, connectionTimeout: 10_000, greetingTimeout: 10_000, socketTimeout: 20_000 }, { from });
  try {
    await transport.sendMail({ to: { name: "", address: letter.to }, subject: letter.subject, text: letter.text });
  } catch (error) {
    console.error(`mail to ${letter.to} was not sent`, error);
    throw new Refusal("mail-failed", { detail: String(error) });
  }
}
