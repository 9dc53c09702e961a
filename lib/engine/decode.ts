// In: edges, block by block. Out: bits, then transactions and bytes, block by block; see decoder.ts for the contract.

import { ConditionDecoder } from "./bits/conditions";
import { createSpikeFilter, spikesAreBelowResolution } from "./bits/spikes";
import { Assembler } from "./bus/assembler";
import type { CreateDecoder } from "./decoder";
import type { EdgeBlock } from "./samples/edges";

export const createDecoder: CreateDecoder = (head, listener) => {
  const assembler = new Assembler(listener);
  const conditions = new ConditionDecoder(head.levels === "volts", (block) => {
    assembler.bits(block);
    listener.bits(block);
  });
  let edgesSeen = 0;
  function decode(block: EdgeBlock): void {
    conditions.run(block, 0, block.length, edgesSeen);
    edgesSeen += block.length;
  }
  const passAll = head.levels === "digital" && spikesAreBelowResolution(head.timebase, head.sampleTicks);
  const filter = passAll
    ? null
    : createSpikeFilter(head.timebase, { edges: decode, spike: listener.spike, inHs: () => conditions.inHs() });

  return {
    push(block) {
      if (filter === null) decode(block);
      else filter.push(block);
      conditions.flush();
      assembler.flush();
    },
    finish(endTick) {
      filter?.finish();
      conditions.finish(endTick);
      assembler.flush();
    },
  };
};
