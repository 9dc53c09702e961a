// In: the source and what the head settled. Out: walks over the rows of readings, from the start, as often as needed.

import type { ByteSource } from "../../bytes/source";
import { decode, plainChunks, plainEncoding, type TextForm } from "../../bytes/text";
import type { Axis } from "./axis";
import type { Layout } from "./layout";
import type { Selection } from "./lines";
import { INSTANT, type ScanPlan } from "./plan";
import { QuotedReader } from "./quoted";
import type { RowTarget } from "./rows";
import { type FastPath, Scanner } from "./scanner";

/** Bytes after which a survey may end, and a first block of edges leaves. */
const SLICE = 65_536;

export interface Body {
  readonly source: ByteSource;
  readonly form: TextForm;
  readonly layout: Layout;
  readonly axis: Axis;
  /** Walks until `enough` says so (asked after every slice) or to the end. */
  walk(selection: Selection, target: RowTarget & { finish(): void }, enough: () => boolean): Promise<void>;
}

export function scanPlan(layout: Layout, axis: Axis, selection: Selection): ScanPlan {
  const modes = selection.modes.slice();
  if (axis.clock.column >= 0) modes[axis.clock.column] = INSTANT;
  return {
    dialect: layout.dialect,
    width: layout.width,
    namedWidth: layout.namedWidth,
    firstLine: layout.firstLine,
    clock: axis.clock,
    modes,
    slots: selection.slots,
    powers: selection.powers,
    values: selection.values,
  };
}

/** Whoever takes the body's bytes: the scanner, or papaparse where cells are quoted. */
export interface BodyReader {
  push(bytes: Uint8Array): void;
  finish(): void;
}

export function bodyReader(plan: ScanPlan, form: TextForm, target: RowTarget, fast: FastPath | null): BodyReader {
  const scanner = new Scanner(plan, target, fast);
  return plan.dialect.quoted ? new QuotedReader(scanner, target, (bytes) => decode(bytes, plainEncoding(form))) : scanner;
}

export function bodyOf(source: ByteSource, form: TextForm, layout: Layout, axis: Axis): Body {
  return {
    source,
    form,
    layout,
    axis,
    async walk(selection, target, enough) {
      const reader = bodyReader(scanPlan(layout, axis, selection), form, target, null);
      // Asked at fixed places of the file, whatever lengths its bytes come in: a survey must find the same everywhere.
      let read = 0;
      for await (const chunk of plainChunks(source.open(), form)) {
        for (let from = 0; from < chunk.length; ) {
          const to = Math.min(chunk.length, from + SLICE - (read % SLICE));
          reader.push(chunk.subarray(from, to));
          read += to - from;
          from = to;
          if (read % SLICE === 0 && enough()) return;
        }
      }
      reader.finish();
      target.finish();
    },
  };
}
