// In: how many rows of one height, and where the page is scrolled to. Out: which rows to draw and where. Browsers cap the
// height of a page (33 554 432 px in Chromium, less elsewhere), so a long list gets a shorter track: near moves stay pixel
// for pixel, far moves of the scrollbar are scaled, and the last row can always be reached.

/** Height of the track where the rows would need more. Below every browser's cap that we know. */
export const TRACK = 8_000_000;

export interface Extent {
  readonly rows: number;
  readonly rowHeight: number;
  /** Height of the visible part. */
  readonly view: number;
}

/** `offset`: pixels of the unscaled list above the visible part. `top`: the same on the track. */
export interface Position {
  readonly offset: number;
  readonly top: number;
}

export function trackHeight(extent: Extent): number {
  return Math.min(TRACK, extent.rows * extent.rowHeight);
}

function ends(extent: Extent): { readonly offset: number; readonly top: number } {
  return {
    offset: Math.max(0, extent.rows * extent.rowHeight - extent.view),
    top: Math.max(0, trackHeight(extent) - extent.view),
  };
}

/** Where on the track an offset lies. */
export function settled(extent: Extent, offset: number): Position {
  const end = ends(extent);
  const kept = Math.min(end.offset, Math.max(0, offset));
  const top = end.offset === end.top ? kept : Math.round((kept / Math.max(1, end.offset)) * end.top);
  return { offset: kept, top };
}

/**
 * The list after the track moved to `top`. A move shorter than two views is taken as it is; a longer one is a jump along
 * the scrollbar and scaled. At either end of the track the list is at its end too.
 */
export function moved(extent: Extent, position: Position, top: number): Position {
  const end = ends(extent);
  if (end.offset === end.top) return { offset: Math.min(end.offset, Math.max(0, top)), top };
  if (top <= 0) return { offset: 0, top: 0 };
  if (top >= end.top) return { offset: end.offset, top: end.top };
  const by = top - position.top;
  if (Math.abs(by) > 2 * extent.view) return { offset: (top / end.top) * end.offset, top };
  return { offset: Math.min(end.offset, Math.max(0, position.offset + by)), top };
}

export interface RowSpan {
  readonly first: number;
  /** One past the last. */
  readonly end: number;
  /** Where row `first` stands on the track. */
  readonly top: number;
}

/** Rows to draw: the visible ones and `spare` on both sides. */
export function rowSpan(extent: Extent, position: Position, spare: number): RowSpan {
  const first = Math.max(0, Math.floor(position.offset / extent.rowHeight) - spare);
  const end = Math.min(extent.rows, Math.ceil((position.offset + extent.view) / extent.rowHeight) + spare);
  return { first, end, top: position.top + first * extent.rowHeight - position.offset };
}

/**
 * The offset that brings a row into view: a row just outside comes in with its neighbour, a far one is put at a third of the
 * view, so that what follows it (a retry, say) is seen too. `above` pixels of the view are taken by what stands before the list.
 */
export function revealing(extent: Extent, offset: number, row: number, above: number): number {
  const { rowHeight, view } = extent;
  const from = row * rowHeight;
  const first = offset + above;
  const last = offset + view - rowHeight;
  if (from >= first && from + rowHeight <= last + rowHeight * 0.25) return offset;
  if (from < first && from > first - 2 * rowHeight) return from - above;
  if (from > last - rowHeight && from < last + 2 * rowHeight) return from + 2 * rowHeight - view;
  // The first rows stand just below what comes before the list.
  return Math.max(-above, from - view / 3);
}
