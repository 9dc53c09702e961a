// In: bits. Out: the landing "transactions": one row per START or repeated START, and the bytes they carry. Columns grow in
// blocks while the file is read, so a page shows the first rows at once. UM10204 3.1.10 - 3.1.17.

export const OPENS = ["S", "Sr"] as const;
export const CLOSES = ["P", "Sr", "none"] as const;
export const KINDS = [
  "normal",
  "general-call",
  "start-byte",
  "hs-controller-code",
  "device-id",
  "reserved",
  "bus-clear",
  "broken",
] as const;
export const DIRECTIONS = ["W", "R", null] as const;
/** Acknowledge column values. */
export const NACK = 0;
export const ACK = 1;
export const NO_ACK_BIT = 2;
/** Address column value where the bits needed were never sent. */
export const NO_ADDRESS = -1;

/** bits of `TransactionBlock.flags` */
export const FLAG = {
  /** A bit's SDA changed in the tick of the SCL rise. */
  setupWithinSample: 1,
  /** The record ends, or is cut, before this transaction does. */
  endsInRecord: 2,
  /** A START or STOP stood where a data bit or acknowledge was due (inside a byte). */
  misplacedStart: 4,
  misplacedStop: 8,
  shortByte: 16,
  /** START followed at once by STOP. */
  voidMessage: 32,
  hs: 64,
  /** Ended because a line became unknown. */
  unknown: 128,
  /** A spike shorter than tSP was taken out inside it. */
  spike: 256,
  /** SDA changed while SCL was high inside a byte without being a lawful condition (spec's undefined pair, noise). */
  sdaWhileHigh: 512,
  stretched: 1024,
  faulty: 2048,
} as const;

/** Struct of arrays over `length` transactions; `first` is the index of entry 0 in the whole capture. */
export interface TransactionBlock {
  readonly first: number;
  readonly length: number;
  readonly startTick: Float64Array;
  /** STOP or following Sr or, where none came, the last edge that belonged to it. */
  readonly endTick: Float64Array;
  /** Index over the whole capture of the START's edge and of the closing edge. */
  readonly startEdge: Float64Array;
  readonly endEdge: Float64Array;
  readonly opens: Uint8Array;
  readonly closes: Uint8Array;
  readonly kind: Uint8Array;
  /** Complete address bytes: 0, 1 or 2. They are the first entries of this transaction in the ByteBlock. */
  readonly addressBytes: Uint8Array;
  /** 7- or 10-bit address, or NO_ADDRESS. */
  readonly address: Int16Array;
  /** 7, 10, or 0 where not known. */
  readonly addressBits: Uint8Array;
  /** Index into DIRECTIONS. */
  readonly direction: Uint8Array;
  readonly addressAck: Uint8Array;
  readonly flags: Uint16Array;
  /** Index over the whole capture of its first byte, and how many bytes follow (address, data, and a broken last one). */
  readonly firstByte: Float64Array;
  readonly byteCount: Uint32Array;
  /** SCL pulses from START on, for bit_index arithmetic. */
  readonly pulses: Uint32Array;
}

/** Every byte on the bus, address bytes included. */
export interface ByteBlock {
  readonly first: number;
  readonly length: number;
  readonly value: Uint8Array;
  /** NACK, ACK or NO_ACK_BIT. */
  readonly ack: Uint8Array;
  /** Data bits seen, 0 to 8. A broken byte's value holds the bits seen, right-justified. */
  readonly bits: Uint8Array;
  /** SCL rise of its first bit, and the SCL fall after its ninth (or its last edge where it broke off). */
  readonly startTick: Float64Array;
  readonly endTick: Float64Array;
}
