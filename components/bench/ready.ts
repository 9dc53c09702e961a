"use client";

import { useEffect } from "react";
import { makeReady } from "./client";

/** The page itself comes first: a decoder is started for the file that will come once the page has stood so long. */
const READY_MS = 200;

/** For every page that takes files. */
export function useReadyDecoder(): void {
  useEffect(() => {
    const timer = setTimeout(makeReady, READY_MS);
    return () => clearTimeout(timer);
  }, []);
}
