// In: bits of a capture in volts. Out: the levels that the lines settle at, in columns of volts.

import type { BitBlock } from "../engine/bits/bits";
import { Column } from "./column";

/** Volts. Ticks and transactions of the extremes say where. */
export interface LevelColumns {
  readonly sclLow: Column;
  readonly sdaLow: Column;
  readonly sdaHigh: Column;
}

export function levelColumns(doubt: number): LevelColumns {
  return {
    sclLow: new Column("VOL SCL", [], doubt),
    sdaLow: new Column("VOL SDA", [], doubt),
    sdaHigh: new Column("VOH SDA", [], doubt),
  };
}

export function noteLevels(levels: LevelColumns, block: BitBlock, i: number, transaction: number): void {
  const { leads } = block;
  if (leads === null) return;
  const scl = leads.sclLow[i];
  const sda = leads.sdaHigh[i];
  const tick = block.tick[i];
  if (!Number.isNaN(scl)) levels.sclLow.add(scl, 0, tick, transaction);
  if (!Number.isNaN(sda)) (block.value[i] === 1 ? levels.sdaHigh : levels.sdaLow).add(sda, 0, tick, transaction);
}
