"use client";

import { setNonce } from "get-nonce";

/** Hands the page's CSP nonce to the dialogs, which add a style element while they are open. */
export function NonceBridge({ nonce }: { nonce: string }) {
  if (nonce) setNonce(nonce);
  return null;
}
