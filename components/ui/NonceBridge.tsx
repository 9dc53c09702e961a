"use client";

import { setNonce } from "get-nonce";

let handed = false;

/** Hands the page's CSP nonce to the dialogs, which add a style element while they are open. */
export function NonceBridge({ nonce }: { nonce: string }) {
  // Only the document's own: an action renders the layout anew, under a nonce that this document does not know.
  if (nonce && !handed) setNonce(nonce);
  handed ||= nonce !== "";
  return null;
}
