"use client";

import { Button } from "@/components/ui/Button";
import { SwapShape, Tick } from "@/components/ui/Icon";
import type { PairPreview } from "@/lib/engine/channels/trace";
import type { CapturePreview } from "@/lib/engine/samples/preview";
import type { ReadChoices } from "@/lib/engine/samples/reader";
import { count } from "@/lib/view/format";

export interface ChannelsProps {
  preview: CapturePreview;
  read: ReadChoices;
  onRead: (read: ReadChoices) => void;
  onConfirm: () => void;
}

function channelName(preview: CapturePreview, id: string): string {
  const channel = preview.channels.find((entry) => entry.id === id);
  return channel?.name ? `${channel.name} (${id})` : id;
}

function Order({ title, pair, preview }: { title: string; pair: PairPreview | null; preview: CapturePreview }) {
  if (!pair) return null;
  return (
    <div className="min-w-0">
      <p className="font-serif text-body">
        <span className="italic text-quiet">{title}</span> SCL is {channelName(preview, pair.scl)}, SDA is{" "}
        {channelName(preview, pair.sda)}
      </p>
      <p className="tabular truncate text-hex">{pair.firstBytes || "no byte"}</p>
      <p className="font-sans text-small text-quiet">
        {count(pair.transactions)} STARTs, {count(pair.wholeBytes)} whole bytes, {count(pair.breaks)}{" "}
        {pair.breaks === 1 ? "break" : "breaks"} inside a byte
      </p>
    </div>
  );
}

function Choice({
  label,
  value,
  preview,
  onChange,
}: {
  label: string;
  value: string;
  preview: CapturePreview;
  onChange: (id: string) => void;
}) {
  return (
    <label className="inline-flex items-baseline gap-2 font-sans text-label text-quiet">
      {label}
      <select
        value={value}
        onChange={(event) => onChange(event.target.value)}
        className="max-w-56 border-0 border-b border-field bg-transparent py-0.5 text-ink hover:border-ink [&>option]:bg-paper"
      >
        {preview.channels
          .filter((channel) => channel.kind !== "other")
          .map((channel) => (
            <option key={channel.id} value={channel.id}>
              {channelName(preview, channel.id)}
            </option>
          ))}
      </select>
    </label>
  );
}

/** Which channel is which, why it is thought so, and what either order decodes to. Stands until a person has said yes. */
export function Channels({ preview, read, onRead, onConfirm }: ChannelsProps) {
  const { proposal } = preview;
  if (!proposal) return null;
  const choose = (scl: string, sda: string) => onRead({ ...read, scl, sda });
  return (
    <section aria-labelledby="channels-head" className="screen-only mb-4 border-y border-ink py-3">
      <h2 id="channels-head" className="font-serif text-[1.0625rem] italic">
        Is this the right way round?
      </h2>
      <div className="mt-2 grid gap-x-10 gap-y-3 md:grid-cols-2">
        <Order title="As read:" pair={preview.preview} preview={preview} />
        <Order title="Swapped:" pair={preview.swapped} preview={preview} />
      </div>
      <p className="mt-2 max-w-[80ch] font-sans text-small text-quiet">{proposal.reason}</p>
      <div className="mt-3 flex flex-wrap items-baseline gap-x-5 gap-y-2">
        <Button look="solid" onClick={onConfirm}>
          <Tick /> yes, as read
        </Button>
        <Button onClick={() => choose(proposal.sda, proposal.scl)}>
          <SwapShape /> swap them
        </Button>
        {preview.channels.length > 2 && (
          <>
            <Choice label="SCL" value={proposal.scl} preview={preview} onChange={(id) => choose(id, proposal.sda)} />
            <Choice label="SDA" value={proposal.sda} preview={preview} onChange={(id) => choose(proposal.scl, id)} />
          </>
        )}
      </div>
    </section>
  );
}
