import "server-only";
import { type Role, roleWords } from "@/lib/case/roles";
import { settings } from "@/lib/server/settings";

/** A plain-text mail ready to send. */
export interface Letter {
  readonly to: string;
  readonly subject: string;
  readonly text: string;
}

interface Invited {
  readonly email: string;
  readonly role: Role;
  readonly team: string;
  readonly from: string;
  readonly token: string;
  readonly days: number;
}

export function invitationLetter({ email, role, team, from, token, days }: Invited): Letter {
  return {
    to: email,
    subject: `${from} invites you to ${team} on Firstlow`,
    text: [
      `${from} has kept a place for you in the team ${team}.`,
      "",
      `Your role would be ${role}: ${roleWords[role]}.`,
      "",
      "To take the place, open this address:",
      `${settings().app.url}/invitation/${token}`,
      "",
      `It works once and for ${days} days. If you do not know ${from}, ignore this mail; nothing happens without you.`,
      "",
    ].join("\n"),
  };
}

export function resetLetter(user: { email: string; name: string }, token: string, minutes: number): Letter {
  return {
    to: user.email,
    subject: "A new password for Firstlow",
    text: [
      `Hello ${user.name},`,
      "",
      "somebody, probably you, asked for a new password. To choose one, open this address:",
      `${settings().app.url}/reset/${token}`,
      "",
      `It works once and for ${minutes} minutes, and signs out every browser. If it was not you, ignore this mail:`,
      "your password stays as it is.",
      "",
    ].join("\n"),
  };
}
