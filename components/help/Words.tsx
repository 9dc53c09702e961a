const WORDS: readonly (readonly [string, string])[] = [
  ["capture", "one uploaded recording and what was read from it"],
  ["case", "one capture or several with settings, tags, notes, a finding and its sharing; what people work on"],
  ["stack", "the ledger whose every row is one transaction drawn from its own edges, aligned at START, on one time scale"],
  ["strip", "the continuous trace of the whole capture, zoomed by time"],
  ["score", "the line of notation under a trace: bit ticks, byte values under braces, S Sr P A N"],
  ["contest", "a stretch of bus time in which more than one controller drives"],
  ["contender", "a controller that takes part in a contest"],
  ["deciding bit", "the bit that settles a contest: one sends 0, another 1, and the bus shows 0"],
  ["kept the bus, yielded", "how a contest ended, for the one and the other"],
  ["bit race", "a contest drawn bit by bit: what each contender intended, the wired AND, the deciding bit"],
  ["evidence", "one observation that speaks for or against a contest, with its weight"],
  ["drive tap", "an extra channel that shows what one controller itself drives"],
  ["look-alike", "a mechanism that makes a controller report lost arbitration with no contest on the bus"],
  ["limits profile", "the set of limits a capture is judged by: a mode of the specification, or a team's own"],
  [
    "too close to call",
    "a figure nearer to its limit than the sampling can tell, or a pass nearer to a least value than slow edges may hide from a recording with one threshold",
  ],
  ["roster", "the devices on the bus: address, name, registers, bus parameters"],
  ["fault tag", "a category put on a transaction, from a catalogue the team can extend"],
  ["finding", "the written conclusion of a case, citing transactions, contests and measurements"],
  ["brief", "the printable report of a case"],
];

const EVIDENCE: readonly (readonly [string, string])[] = [
  [
    "drive tap",
    "A controller lets go of SDA while the bus is low, in a bit it was driving. Nothing else does that: the contest is certain.",
  ],
  [
    "low level",
    "Captures in volts only. Two drivers together pull lower than one, and each has its own low level; the step shows who let go.",
  ],
  [
    "clock changes",
    "While two controllers clock together, SCL is low as long as the longer of their lows and high as short as the shorter of their highs. After the yield the clock is that of the one that stayed. A change the other way is no contest.",
  ],
  ["START held short", "SCL falls sooner after START than this controller ever does alone: somebody else started first."],
  [
    "data timing",
    "After SCL falls, SDA falls at the earliest and rises at the latest of the drivers' own delays. Two drivers show both.",
  ],
  [
    "retry follows",
    "A later message equals the one that kept the bus up to a bit where that had 0 and this has 1. Weighed by how often such a pair occurs by chance.",
  ],
  ["controller log", "A log reports lost arbitration at that time, once the clock of the log has been matched to the capture's."],
];

function Terms({ list }: { list: readonly (readonly [string, string])[] }) {
  return (
    <dl className="mt-2 max-w-[60rem] font-serif text-body sm:grid sm:grid-cols-[11rem_1fr] sm:gap-x-6 sm:gap-y-1.5">
      {list.map(([term, words]) => (
        <div key={term} className="mb-2 sm:contents">
          <dt className="italic text-quiet">{term}</dt>
          <dd>{words}</dd>
        </div>
      ))}
    </dl>
  );
}

/** Our own words; those of the trade are the specification's. */
export function Words() {
  return <Terms list={WORDS} />;
}

/** The kinds of evidence in plain words. */
export function EvidenceKinds() {
  return <Terms list={EVIDENCE} />;
}
