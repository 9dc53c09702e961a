// The two doors of papaparse that the engine uses, typed here because @types/papaparse brings the Node and DOM types
// with it, which the engine's rooms must compile without.
declare module "papaparse/papaparse.min.js" {
  interface RowsRead {
    readonly data: string[][];
    readonly errors: readonly { readonly code: string; readonly row?: number }[];
    /** Position after the last whole row. */
    readonly meta: { readonly cursor: number };
  }
  interface RowParser {
    parse(input: string, baseIndex: number, ignoreLastRow: boolean): RowsRead;
  }
  const Papa: { readonly Parser: new (config: { delimiter: string; newline: string; quoteChar: string }) => RowParser };
  export default Papa;
}
