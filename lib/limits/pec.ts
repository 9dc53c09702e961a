// In: bytes. Out: SMBus packet error code: CRC-8, x^8 + x^2 + x + 1, initial 0, no reflection (Linux smbus-protocol.rst, RM0440).

const POLYNOMIAL = 0x07;

const TABLE = Uint8Array.from({ length: 256 }, (_, byte) => {
  let crc = byte;
  for (let bit = 0; bit < 8; bit++) crc = (crc & 0x80) === 0 ? crc << 1 : ((crc << 1) ^ POLYNOMIAL) & 0xff;
  return crc;
});

/** The code after one more byte. */
export function crc8(crc: number, byte: number): number {
  return TABLE[crc ^ byte];
}

/** PEC of a whole message: every byte, address bytes included. */
export function pec(bytes: Iterable<number>): number {
  let crc = 0;
  for (const byte of bytes) crc = crc8(crc, byte);
  return crc;
}
