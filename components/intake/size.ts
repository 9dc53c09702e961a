/** A file's size as people read it: 812 bytes, 45.2 kB, 200 MB. */
export function size(bytes: number): string {
  if (bytes < 1000) return `${bytes} bytes`;
  const units = ["kB", "MB", "GB"];
  let value = bytes / 1000;
  let unit = 0;
  while (value >= 999.5 && unit < units.length - 1) {
    value /= 1000;
    unit++;
  }
  return `${value < 99.95 ? value.toFixed(1) : Math.round(value)} ${units[unit]}`;
}
