// In: chunks of a CSV body with quoted cells. Out: the same rows as the scanner delivers, split by papaparse in pieces
// that end between rows. A quote that never closes costs its own line, not the rest of the file.

import type { RowTarget } from "./rows";
import type { Scanner } from "./scanner";
import { lineFeeds, linesOf, splitText } from "./split";

/** Characters that a single row may take before its quote counts as never closed. */
const ROW_LIMIT = 1 << 18;

export class QuotedReader {
  private text = "";
  private readonly bytes: Uint8Array[] = [];

  constructor(
    private readonly scanner: Scanner,
    private readonly target: RowTarget,
    private readonly decodeText: (bytes: Uint8Array) => string,
  ) {}

  push(chunk: Uint8Array): void {
    // Only whole lines are decoded, so that no character is cut in two and no CR parted from its LF.
    const end = Math.max(chunk.lastIndexOf(10) + 1, chunk.lastIndexOf(13, chunk.length - 2) + 1);
    if (end > 0) {
      this.bytes.push(chunk.subarray(0, end));
      this.text += this.take();
      this.drain();
    }
    if (end < chunk.length) this.bytes.push(chunk.slice(end));
  }

  finish(): void {
    this.text += this.take();
    if (!this.text.endsWith("\n")) this.text += "\n";
    for (;;) {
      this.drain();
      if (this.text === "") return;
      this.dropLine();
    }
  }

  private take(): string {
    const all = new Uint8Array(this.bytes.reduce((sum, part) => sum + part.length, 0));
    let at = 0;
    for (const part of this.bytes) {
      all.set(part, at);
      at += part.length;
    }
    this.bytes.length = 0;
    return lineFeeds(this.decodeText(all));
  }

  private drain(): void {
    const { plan } = this.scanner;
    while (this.scanner.line < plan.firstLine) {
      const at = this.text.indexOf("\n");
      if (at < 0) return;
      this.text = this.text.slice(at + 1);
      this.scanner.line += 1;
    }
    for (;;) {
      const split = splitText(this.text, plan.dialect.delimiter, true);
      this.text = this.text.slice(split.used);
      for (const row of split.rows) this.deliver(row);
      if (this.text.length < ROW_LIMIT) return;
      this.dropLine();
    }
  }

  private deliver(row: readonly string[]): void {
    if (row.length > 1 || row[0].trim() !== "") {
      this.scanner.cells(row);
      this.scanner.rowNumber += 1;
    }
    this.scanner.line += linesOf(row);
  }

  /** The quote does not close: its line is set aside and reading goes on behind it. */
  private dropLine(): void {
    this.target.aside(this.scanner.line, "quote");
    this.scanner.line += 1;
    this.scanner.rowNumber += 1;
    const at = this.text.indexOf("\n");
    this.text = at < 0 ? "" : this.text.slice(at + 1);
  }
}
