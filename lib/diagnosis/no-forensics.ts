// In: nothing. Out: forensics that concludes nothing; stands in until the real one is there.

import type { CreateForensics } from "../forensics/contract";

export const createForensics: CreateForensics = () => ({
  bits() {},
  transactions() {},
  tap() {},
  conclude: () => ({ contests: [], controllers: [], attribution: new Int16Array(0), stretches: [], lookAlikes: [] }),
});
