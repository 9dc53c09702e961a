"use client";

import { type ReactNode, useCallback, useEffect, useMemo, useRef, useState } from "react";
import { Facts } from "@/components/lede/Facts";
import { Lede } from "@/components/lede/Lede";
import { Patterns } from "@/components/score/Patterns";
import { Overview } from "@/components/strip/Overview";
import type { AnalysisSettings } from "@/lib/diagnosis/analysis";
import type { Capture } from "@/lib/view/capture";
import { EVERYTHING, filtered } from "@/lib/view/filter";
import { neighbour } from "@/lib/view/marks";
import type { Bounds } from "@/lib/view/scale";
import type { ViewState } from "@/lib/view/state";
import { verdicts } from "@/lib/view/words";
import type { Source } from "@/workers/protocol";
import { type BenchCase, NO_CASE, spansOf } from "./annotations";
import { Brief } from "./Brief";
import { Channels } from "./Channels";
import { Help } from "./Help";
import { useKeys } from "./keys";
import { MarginColumn } from "./MarginColumn";
import { usePlace } from "./place";
import { Readings, spanAround } from "./Readings";
import { Refusal } from "./Refusal";
import { Settings } from "./Settings";
import { Sheet } from "./Sheet";
import { StageLine } from "./StageLine";
import { type Session, useSession } from "./session";
import { Warnings } from "./Warnings";

export const FRESH_SETTINGS: AnalysisSettings = { read: {}, limits: null, cb_pf: null, roster: [], log: [] };

export interface BenchProps {
  /** Keep its identity while it is the same file: another object is read anew. */
  source: Source;
  title: string;
  settings?: AnalysisSettings;
  /** A person changed how the file is read or judged; absent where that may not be changed. */
  onSettings?: (settings: AnalysisSettings) => void;
  /** Notes, tags, finding, device names; none at the front door. */
  of?: BenchCase;
  /** Whether a person has already confirmed the channels (a saved case, a share). */
  confirmed?: boolean;
  onConfirmed?: (capture: Capture) => void;
  /** Told once the whole file was analysed: what a case saves. */
  onDone?: (capture: Capture) => void;
  /** Query of the view a share was made at. */
  initialView?: string;
  /** Above the title: case line, status. Beside it: save, share. */
  above?: ReactNode;
  actions?: ReactNode;
}

/** One capture on the bench: read in the worker, shown as sentences, stack, strip, limits and faults. */
export function Bench(props: BenchProps) {
  const { source, onDone } = props;
  const [settings, setSettings] = useState(props.settings ?? FRESH_SETTINGS);
  useEffect(() => setSettings(props.settings ?? FRESH_SETTINGS), [props.settings]);
  const session = useSession(source, settings);
  const [confirmed, setConfirmed] = useState(props.confirmed ?? false);
  const { capture, stage } = session;

  useEffect(() => {
    if (stage.is === "done" && capture) onDone?.(capture);
  }, [stage.is, capture, onDone]);

  function change(next: AnalysisSettings) {
    setSettings(next);
    props.onSettings?.(next);
  }

  const mayChange = props.onSettings !== undefined || props.settings === undefined;
  return (
    <div className="mx-auto max-w-[90rem] px-4 pb-24 pt-5 sm:px-10 lg:pb-10">
      <Patterns />
      {props.above}
      <div className="mb-1 flex flex-wrap items-baseline justify-between gap-x-8 gap-y-2">
        <h1 className="min-w-0 font-serif text-head [overflow-wrap:anywhere]">{props.title}</h1>
        <div className="screen-only flex flex-wrap items-baseline gap-5">{props.actions}</div>
      </div>
      <StageLine session={session} size={source.blob.size} name={source.name} />
      {stage.is === "refused" && (
        <Refusal
          problem={stage.problem}
          preview={session.preview}
          read={settings.read}
          name={source.name}
          onRead={(read) => change({ ...settings, read })}
        />
      )}
      {stage.is !== "refused" && !confirmed && session.preview?.proposal && mayChange && (
        <Channels
          preview={session.preview}
          read={settings.read}
          onRead={(read) => change({ ...settings, read })}
          onConfirm={() => {
            setConfirmed(true);
            if (capture) props.onConfirmed?.(capture);
          }}
        />
      )}
      {capture && (
        <Opened {...props} session={session} capture={capture} settings={settings} onChange={mayChange ? change : null} />
      )}
    </div>
  );
}

interface OpenedProps extends BenchProps {
  session: Session;
  capture: Capture;
  settings: AnalysisSettings;
  onChange: ((settings: AnalysisSettings) => void) | null;
}

function ascending(transactions: readonly (number | null)[]): number[] {
  return [...new Set(transactions.filter((entry) => entry !== null))].sort((a, b) => a - b);
}

function Opened({ session, capture, settings, onChange, of = NO_CASE, initialView }: OpenedProps) {
  const { version } = session;
  const [state, change] = usePlace(initialView);
  const [help, setHelp] = useState(false);
  const [view, setView] = useState<{ first: number; last: number } | null>(null);
  const searchField = useRef<HTMLInputElement>(null);
  const noteField = useRef<HTMLTextAreaElement>(null);
  const tagged = useMemo(() => ascending(of.tags.map((tag) => tag.transaction)), [of.tags]);
  const noted = useMemo(() => ascending(of.notes.map((note) => note.transaction)), [of.notes]);
  const spans = useMemo(() => spansOf(of), [of]);
  const names = useMemo(() => namesOf(of, settings), [of, settings]);
  // biome-ignore lint/correctness/useExhaustiveDependencies: the capture grows in place, the version says when
  const rows = useMemo(
    () => filtered({ ledger: capture.ledger, marks: capture.marks, tagged }, state.filter),
    [capture, version, tagged, state.filter],
  );

  const go = useCallback(
    (transaction: number) => {
      if (transaction < 0 || transaction >= capture.ledger.length) return;
      const hidden = rows !== null && !has(rows, transaction);
      const stays = state.reading === "contests" && capture.marks.of(transaction).contest !== null;
      const place = state.reading === "strip" ? spanAround(capture, transaction) : stays ? {} : { reading: "stack" as const };
      change({ ...place, selected: transaction, ...(hidden ? { filter: EVERYTHING } : {}) });
    },
    [capture, rows, state.reading, change],
  );

  const moves = useMoves({ capture, rows, selected: state.selected, go });
  const span = state.reading === "strip" ? state.strip : null;
  async function tag(kind: string) {
    if (!of.addTag) return;
    if (state.selected === null) {
      if (span !== null) await of.addTag({ span }, kind);
    } else if ((await of.addTag({ transaction: state.selected }, kind)) === null) moves.step(1);
  }
  useKeys({
    next: () => moves.step(1),
    previous: () => moves.step(-1),
    first: () => moves.end(-1),
    last: () => moves.end(1),
    fault: (step) => moves.along(capture.marks.faulty, step),
    contest: (step) => moves.along(capture.marks.contested, step),
    open: () => state.selected !== null && change(spanAround(capture, state.selected)),
    reading: () => change({ reading: state.reading === "strip" ? "stack" : "strip" }),
    tag: of.addTag ? () => document.querySelector<HTMLButtonElement>("#tag-catalogue button")?.focus() : null,
    note: of.addNote ? () => noteField.current?.focus() : null,
    search: () => searchField.current?.focus(),
    help: () => setHelp(true),
    leave: () => change({ selected: null }),
    other: (key) => {
      const kind = of.tagKinds.find((entry) => entry.key === key && !entry.retired);
      if (kind) tag(kind.id);
      return kind !== undefined;
    },
  });

  const onView = useCallback((first: number, last: number) => setView({ first, last }), []);
  const shown = windowOf(capture, state, view);
  const margin = (
    <MarginColumn
      capture={capture}
      of={of}
      selected={state.selected}
      span={span}
      names={names}
      onGo={go}
      onSpan={(strip) => change({ reading: "strip", strip, selected: null })}
      onTag={tag}
      noteField={noteField}
      onAddress={(address) => change({ reading: "stack", filter: { ...EVERYTHING, address } })}
    />
  );
  return (
    <div className="lg:grid lg:grid-cols-[minmax(0,1fr)_18rem] lg:gap-x-9">
      <div className="min-w-0">
        {capture.summary && <Lede sentences={capture.summary.lede ?? []} onGo={go} />}
        <div className="mb-3 mt-2 flex flex-wrap gap-x-6 gap-y-1.5">
          <Facts capture={capture} />
        </div>
        <div className="mb-3 flex flex-wrap items-start gap-x-6 gap-y-1.5">
          <Warnings warnings={capture.summary?.capture.warnings ?? capture.head.warnings} />
          {onChange && <Settings settings={settings} head={capture.head} onSettings={onChange} />}
        </div>
        <Overview
          capture={capture}
          version={version}
          window={shown}
          selected={state.selected}
          onSelect={go}
          onSpan={(strip) => change({ reading: "strip", strip })}
          tagged={tagged}
          noted={noted}
          spans={spans}
        />
        <div className="mt-3">
          <Readings
            capture={capture}
            version={version}
            state={state}
            onState={change}
            onGo={go}
            rows={rows}
            of={of}
            tagged={tagged}
            names={names}
            searchField={searchField}
            onView={onView}
            spans={spans}
          />
        </div>
        <Brief capture={capture} of={of} names={names} />
      </div>
      <aside aria-label="Beside the trace" className="screen-only hidden lg:block">
        <div className="sticky top-4 max-h-[calc(100dvh-2rem)] overflow-y-auto pb-4 pr-1">{margin}</div>
      </aside>
      <Sheet title={sheetTitle(capture, state.selected)}>{margin}</Sheet>
      <Help open={help} onOpenChange={setHelp} />
    </div>
  );
}

/** The part of the record that is looked at: the strip's, or that of the rows of the stack in view. */
function windowOf(
  { ledger }: Capture,
  { reading, strip }: ViewState,
  view: { first: number; last: number } | null,
): Bounds | null {
  if (reading === "strip") return strip;
  if (reading !== "stack" || view === null || view.last >= ledger.length) return null;
  return { from: ledger.startTick(view.first), to: ledger.endTick(view.last) };
}

function sheetTitle(capture: Capture, selected: number | null): string {
  if (selected === null || selected >= capture.ledger.length) return "On this bus";
  const words = verdicts(capture.ledger.row(selected), capture.marks.of(selected), capture.marks);
  return [`Transaction ${selected}`, ...words.map((verdict) => verdict.text)].join(", ");
}

function namesOf(of: BenchCase, settings: AnalysisSettings): Map<number, string> {
  const names = new Map<number, string>();
  for (const device of settings.roster)
    if (device.role === "target" && device.address !== null) names.set(device.address, device.name);
  for (const device of of.devices) names.set(device.address, device.name);
  return names;
}

function has(rows: Uint32Array, transaction: number): boolean {
  return neighbour(rows, transaction - 1, 1) === transaction;
}

interface MovesInput {
  readonly capture: Capture;
  readonly rows: Uint32Array | null;
  readonly selected: number | null;
  readonly go: (transaction: number) => void;
}

/** Steps of the selection: to the neighbour in the ledger as filtered, to its ends, and along a list such as the faults. */
function useMoves({ capture, rows, selected, go }: MovesInput) {
  const total = capture.ledger.length;
  const to = (transaction: number | null) => {
    if (transaction !== null) go(transaction);
  };
  return {
    step(by: 1 | -1) {
      if (rows) to(neighbour(rows, selected ?? -1, by));
      else if (total > 0) go(selected === null ? 0 : Math.max(0, Math.min(total - 1, selected + by)));
    },
    end(side: 1 | -1) {
      const last = (rows ? rows.length : total) - 1;
      if (last < 0) return;
      const place = side === 1 ? last : 0;
      go(rows ? rows[place] : place);
    },
    along(list: readonly number[], by: 1 | -1) {
      to(neighbour(list, selected ?? (by === 1 ? -1 : total), by));
    },
  };
}
