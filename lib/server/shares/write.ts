import "server-only";
import type { z } from "zod";
import { Share } from "@/entities/share";
import { User } from "@/entities/user";
import { redact } from "@/lib/case/redact";
import type { CreatedShare, CreateShareSchema, EditShareSchema, Share as ShareView } from "@/lib/case/wire";
import type { MemberViewer } from "@/lib/server/access/viewer";
import { demand, findCase } from "@/lib/server/access/visible";
import { checkPassword, hashPassword } from "@/lib/server/auth/password";
import { hashToken, newToken } from "@/lib/server/auth/token";
import { record } from "@/lib/server/cases/events";
import { caseFile } from "@/lib/server/cases/file";
import type { EntityManager } from "@/lib/server/database";
import { Refusal } from "@/lib/server/http/problem";
import { forget, strike } from "@/lib/server/rate";
import { settings } from "@/lib/server/settings";
import { findShare, shareView } from "./read";
import { proofCookie } from "./secret";

function inDays(days: number): Date {
  return new Date(Date.now() + days * 86_400_000);
}

/** Makes a link. The answer holds the secret for the only time. */
export async function createShare(
  em: EntityManager,
  viewer: MemberViewer,
  number: number,
  input: z.output<typeof CreateShareSchema>,
): Promise<CreatedShare> {
  demand(viewer, "share.create");
  const row = await findCase(em, viewer, number);
  const secret = newToken();
  const passphraseHash = input.passphrase === null ? null : await hashPassword(input.passphrase);
  return em.transactional(async (tx) => {
    const share = tx.create(Share, {
      case: row,
      label: input.label,
      secretHash: hashToken(secret),
      passphraseHash,
      view: input.view,
      rawAllowed: input.raw_allowed,
      expiresAt: inDays(input.expires_in_days),
      createdBy: tx.getReference(User, viewer.user.id),
    });
    await tx.flush();
    await record(tx, row.id, viewer, {
      kind: "share.created",
      words: `made a link${input.label === "" ? "" : ` for ${input.label}`}`,
      after: {
        share: share.id,
        expires_at: share.expiresAt.toISOString(),
        raw_allowed: share.rawAllowed,
        passphrase: passphraseHash !== null,
      },
    });
    return {
      share: shareView(share, viewer.user.name),
      secret,
      url: `${settings().app.url}/shared/${secret}`,
      removed: [...redact(await caseFile(tx, row)).removed],
    };
  });
}

async function findOwn(em: EntityManager, viewer: MemberViewer, at: { number: number; id: string }): Promise<Share> {
  const row = await findCase(em, viewer, at.number);
  const share = await em.findOne(Share, { id: at.id, case: row.id }, { populate: ["createdBy"] });
  if (!share) throw new Refusal("not-found", { detail: `share ${at.id}` });
  return share;
}

/** Changes a link that works; a revoked one stays revoked. */
export async function editShare(
  em: EntityManager,
  viewer: MemberViewer,
  at: { readonly number: number; readonly id: string },
  input: z.output<typeof EditShareSchema>,
): Promise<ShareView> {
  demand(viewer, "share.create");
  const share = await findOwn(em, viewer, at);
  if (share.revokedAt) throw new Refusal("conflict", { words: "This link was revoked. Make a new one." });
  if (input.label !== undefined) share.label = input.label;
  if (input.expires_in_days !== undefined) share.expiresAt = inDays(input.expires_in_days);
  if (input.raw_allowed !== undefined) share.rawAllowed = input.raw_allowed;
  if (input.view !== undefined) share.view = input.view;
  if (input.passphrase !== undefined)
    share.passphraseHash = input.passphrase === null ? null : await hashPassword(input.passphrase);
  await em.transactional(async (tx) => {
    await tx.flush();
    const { passphrase, ...told } = input;
    await record(tx, share.case.id, viewer, {
      kind: "share.edited",
      words: "changed a link",
      after: { share: share.id, ...told, ...(passphrase === undefined ? {} : { passphrase: passphrase !== null }) },
    });
  });
  return shareView(share, share.createdBy?.getEntity().name ?? "a former member");
}

/** Ends a link at once, for everybody who has it. */
export async function revokeShare(
  em: EntityManager,
  viewer: MemberViewer,
  at: { number: number; id: string },
): Promise<ShareView> {
  demand(viewer, "share.revoke");
  const share = await findOwn(em, viewer, at);
  if (!share.revokedAt) {
    await em.transactional(async (tx) => {
      share.revokedAt = new Date();
      await tx.flush();
      await record(tx, share.case.id, viewer, { kind: "share.revoked", words: "revoked a link", after: { share: share.id } });
    });
  }
  return shareView(share, share.createdBy?.getEntity().name ?? "a former member");
}

/** Checks a link's passphrase and returns the Set-Cookie line that proves it. Tries are counted per link. */
export async function unlockShare(em: EntityManager, secret: string, passphrase: string): Promise<string | null> {
  const share = await findShare(em, secret);
  if (!share.passphraseHash) return null;
  await strike("share-passphrase", share.id);
  if (!(await checkPassword(share.passphraseHash, passphrase))) {
    throw new Refusal("wrong-passphrase", { fields: { passphrase: "This is not the passphrase of this link." } });
  }
  await forget("share-passphrase", share.id);
  return proofCookie(share);
}
