const browsers: readonly (readonly [RegExp, string])[] = [
  [/Edg\//, "Edge"],
  [/OPR\//, "Opera"],
  [/Firefox\//, "Firefox"],
  [/Chrom(e|ium)\//, "Chrome or a relative"],
  [/Safari\//, "Safari"],
];

const systems: readonly (readonly [RegExp, string])[] = [
  [/iPhone|iPad/, "iOS"],
  [/Android/, "Android"],
  [/Windows/, "Windows"],
  [/Mac OS X/, "macOS"],
  [/CrOS/, "ChromeOS"],
  [/Linux/, "Linux"],
];

/** A User-Agent header in two words, good enough to tell one's own browsers apart. */
export function agentWords(agent: string): string {
  const name = browsers.find(([pattern]) => pattern.test(agent))?.[1] ?? "A browser";
  const system = systems.find(([pattern]) => pattern.test(agent))?.[1];
  return system ? `${name} on ${system}` : name;
}
