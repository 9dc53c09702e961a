import "server-only";
import { Case } from "@/entities/case";
import { Share } from "@/entities/share";
import { redact } from "@/lib/case/redact";
import type { SharedView, Share as ShareView } from "@/lib/case/wire";
import type { LinkViewer, MemberViewer } from "@/lib/server/access/viewer";
import { demand, findCase, visibleCases } from "@/lib/server/access/visible";
import { hashToken } from "@/lib/server/auth/token";
import { caseFile } from "@/lib/server/cases/file";
import { type EntityManager, fork } from "@/lib/server/database";
import { Refusal } from "@/lib/server/http/problem";
import { proven, SECRET } from "./secret";

/** What opening a link finds: the case, or a passphrase to ask for. A link that does not work is a refusal "not-found". */
export type Opened = { readonly locked: true } | ({ readonly locked: false; readonly viewer: LinkViewer } & SharedView);

/** The link of this secret while it works; expired, revoked and never made look the same. */
export async function findShare(em: EntityManager, secret: string): Promise<Share> {
  const row = SECRET.test(secret)
    ? await em.findOne(
        Share,
        { secretHash: hashToken(secret), revokedAt: null, expiresAt: { $gt: new Date() } },
        { populate: ["case"] },
      )
    : null;
  if (!row) throw new Refusal("not-found", { detail: "share link" });
  return row;
}

/** The viewer a link makes of its holder. Refuses with "share-locked" while the passphrase has not been given. */
export async function settleLink(secret: string, cookies: string): Promise<LinkViewer> {
  const share = await findShare(await fork(), secret);
  if (share.passphraseHash && !proven(share, cookies)) throw new Refusal("share-locked");
  return viewerOf(share);
}

function viewerOf(share: Share): LinkViewer {
  const { id, team } = share.case.getEntity();
  return { kind: "link", share: { id: share.id, caseId: id, teamId: team.id, download: share.rawAllowed } };
}

/**
 * For the share page: the redacted case at the view that was shared. `cookies` is the request's Cookie header. Throws the
 * refusal "not-found" where the page must answer 404.
 */
export async function readShared(em: EntityManager, secret: string, cookies: string): Promise<Opened> {
  const share = await findShare(em, secret);
  if (share.passphraseHash && !proven(share, cookies)) return { locked: true };
  const viewer = viewerOf(share);
  const row = await em.findOne(Case, visibleCases(viewer));
  if (!row) throw new Refusal("not-found", { detail: "shared case" });
  await em.execute("update shares set opened = opened + 1, last_opened_at = now() where id = ?", [share.id]);
  return {
    locked: false,
    viewer,
    file: redact(await caseFile(em, row)).file,
    view: share.view,
    raw_allowed: share.rawAllowed,
    expires_at: share.expiresAt.toISOString(),
  };
}

/** The links of a case, newest first, without their secrets (nobody has those any more). */
export async function listShares(em: EntityManager, viewer: MemberViewer, number: number): Promise<readonly ShareView[]> {
  demand(viewer, "case.read");
  const row = await findCase(em, viewer, number);
  const shares = await em.find(Share, { case: row.id }, { orderBy: { createdAt: "desc" }, populate: ["createdBy"] });
  return shares.map((share) => shareView(share, share.createdBy?.getEntity().name ?? "a former member"));
}

export function shareView(share: Share, createdBy: string): ShareView {
  return {
    id: share.id,
    label: share.label,
    state: share.revokedAt ? "revoked" : share.expiresAt.getTime() <= Date.now() ? "expired" : "open",
    expires_at: share.expiresAt.toISOString(),
    revoked_at: share.revokedAt?.toISOString() ?? null,
    has_passphrase: Boolean(share.passphraseHash),
    raw_allowed: share.rawAllowed,
    view: share.view,
    created_by: createdBy,
    created_at: share.createdAt.toISOString(),
    opened: share.opened,
    last_opened_at: share.lastOpenedAt?.toISOString() ?? null,
  };
}
