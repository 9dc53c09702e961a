// In: the profiles to be tried. Out: one column per parameter, for Fast/Standard traffic and, when it comes, for Hs.

import type { Timebase } from "../base/time";
import { Column } from "./column";
import { Judge } from "./judge";
import * as P from "./parameters";
import type { LimitTable } from "./profile";
import { tickLimit, ticksOfNs } from "./ticks";

/** Columns of one kind of traffic. In F/S traffic the five edge columns are two: tr and tf. */
export interface ColumnSet {
  readonly period: Column;
  /** Periods whose low was not stretched; only where a table has a lowest frequency. */
  readonly slow: Column | null;
  readonly low: Column;
  readonly high: Column;
  readonly hdSta: Column;
  readonly suSta: Column;
  readonly suSto: Column;
  readonly buf: Column;
  readonly suDat: Column;
  readonly hdDat: Column;
  readonly vdDat: Column;
  readonly vdAck: Column;
  readonly sclRise: Column;
  readonly sclRise1: Column;
  readonly sclFall: Column;
  readonly sdaRise: Column;
  readonly sdaFall: Column;
  readonly spike: Column;
  readonly timeout: Column | null;
}

/**
 * @param tables one limit table per profile tried; an empty list measures without judging
 * @param widest the widest uncertainty of an interval, in ticks
 */
export function columnsFor(tables: readonly LimitTable[], base: Timebase, widest: number, hs: boolean): ColumnSet {
  const perNs = ticksOfNs(1, base);
  const judges = (symbol: string, part: "both" | "min" | "max") =>
    tables.map((table) => {
      const limit = tickLimit(symbol, table, base);
      if (limit === null) return null;
      const min = part === "max" ? Number.NEGATIVE_INFINITY : limit.min;
      const max = part === "min" ? Number.POSITIVE_INFINITY : limit.max;
      return new Judge({ min, max }, perNs);
    });
  const column = (symbol: string, part: "both" | "min" | "max" = "both") => new Column(symbol, judges(symbol, part), widest);
  const floor = tables.some((table) => Number.isFinite(tickLimit("fSCL", table, base)?.max ?? Number.POSITIVE_INFINITY));
  const rise = column(P.RISE.symbol);
  const fall = column(P.FALL.symbol);
  return {
    period: column(P.PERIOD.symbol, "min"),
    slow: floor ? column(P.PERIOD.symbol, "max") : null,
    low: column(P.LOW.symbol),
    high: column(P.HIGH.symbol),
    hdSta: column(P.HD_STA.symbol),
    suSta: column(P.SU_STA.symbol),
    suSto: column(P.SU_STO.symbol),
    buf: column(P.BUF.symbol),
    suDat: column(P.SU_DAT.symbol),
    hdDat: column(P.HD_DAT.symbol),
    vdDat: column(P.VD_DAT.symbol),
    vdAck: column(P.VD_ACK.symbol),
    sclRise: hs ? column(P.HS_EDGES.sclRise.symbol) : rise,
    sclRise1: hs ? column(P.HS_EDGES.sclRise1.symbol) : rise,
    sclFall: hs ? column(P.HS_EDGES.sclFall.symbol) : fall,
    sdaRise: hs ? column(P.HS_EDGES.sdaRise.symbol) : rise,
    sdaFall: hs ? column(P.HS_EDGES.sdaFall.symbol) : fall,
    spike: column(P.SPIKE.symbol),
    timeout: tables.some((table) => table.tTIMEOUT !== undefined) ? column(P.TIMEOUT.symbol) : null,
  };
}

/** Every different column of a set. */
export function columnsOf(set: ColumnSet): Column[] {
  return [...new Set(Object.values(set).filter((column): column is Column => column !== null))];
}
