// In: the bytes that open a transaction. Out: its kind, address and direction. UM10204 Rev 7 3.1.10 - 3.1.12, Table 4.

import { type CLOSES, DIRECTIONS, KINDS, NO_ADDRESS } from "./transactions";

export const KIND = {
  normal: KINDS.indexOf("normal"),
  generalCall: KINDS.indexOf("general-call"),
  startByte: KINDS.indexOf("start-byte"),
  hsCode: KINDS.indexOf("hs-controller-code"),
  deviceId: KINDS.indexOf("device-id"),
  reserved: KINDS.indexOf("reserved"),
  busClear: KINDS.indexOf("bus-clear"),
  broken: KINDS.indexOf("broken"),
} as const;

export const CLOSE = { stop: 0, repeated: 1, none: 2 } as const satisfies Record<string, keyof typeof CLOSES & number>;
export const WRITE = DIRECTIONS.indexOf("W");
export const READ = DIRECTIONS.indexOf("R");
export const NO_DIRECTION = DIRECTIONS.indexOf(null);

/** 1111 0XX: the first byte of a 10-bit address; XX are its two highest bits. */
export function opensTenBit(firstByte: number): boolean {
  return firstByte >> 3 === 0b11110;
}

/** Kind of a transaction whose first byte came whole. */
export function kindOf(firstByte: number): number {
  const address = firstByte >> 1;
  if (address === 0) return (firstByte & 1) === 0 ? KIND.generalCall : KIND.startByte;
  if (address <= 0x03) return KIND.reserved;
  if (address <= 0x07) return KIND.hsCode;
  if (address <= 0x7b) return KIND.normal;
  return address === 0x7c ? KIND.deviceId : KIND.reserved;
}

/** Address and direction as far as the bits sent allow. */
export interface Addressed {
  address: number;
  bits: number;
  direction: number;
}

/**
 * Address of a transaction.
 * @param first first byte, right-justified, of which `seen` bits came (0 to 8)
 * @param second second byte of a 10-bit write, or -1 where it did not come whole
 * @param remembered 10-bit address of the write that this Sr continues, or NO_ADDRESS
 */
export function addressOf(first: number, seen: number, second: number, remembered: number): Addressed {
  if (seen < 7) return { address: NO_ADDRESS, bits: 0, direction: NO_DIRECTION };
  const seven = seen === 8 ? first >> 1 : first;
  const direction = seen === 8 ? ((first & 1) === 0 ? WRITE : READ) : NO_DIRECTION;
  if (seven >> 2 !== 0b11110) return { address: seven, bits: 7, direction };
  const high = (seven & 3) << 8;
  if (direction === WRITE && second >= 0) return { address: high | second, bits: 10, direction };
  const matches = direction === READ && remembered !== NO_ADDRESS && (remembered & 0x300) === high;
  return { address: matches ? remembered : NO_ADDRESS, bits: 10, direction };
}
