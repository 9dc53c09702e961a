// In: codes. Out: plain words and advice for each. Exhaustive: a code without words does not compile.

import type { FaultKind } from "./report";

export interface Words {
  readonly title: string;
  /** What it means, for somebody who was not at the bench. */
  readonly meaning: string;
  readonly advice: string;
  /** Whether it makes the verdict "fail". The others are lawful, tolerated or filtered out, and worth knowing. */
  readonly fails: boolean;
}

export const FAULT_WORDS: Readonly<Record<FaultKind, Words>> = {
  "address-nack": {
    title: "Address not acknowledged",
    meaning: "No device answered to this address: it is absent, unpowered, busy, or the address is wrong.",
    advice:
      "Check the address in its 7-bit and 8-bit form, the device's supply and reset, and whether a retry succeeds later in the capture.",
    fails: true,
  },
  "data-nack": {
    title: "Data not acknowledged",
    meaning: "The receiver refused a byte: it is busy, does not understand the command, or can take no more.",
    advice: "Look up what the device does on this byte; a device that is writing to its memory refuses until it is ready.",
    fails: true,
  },
  "missing-stop": {
    title: "STOP missing",
    meaning: "A transaction was left without STOP, so every other controller takes the bus as busy.",
    advice: "Look for a controller that was reset, timed out or gave up in the middle of a transfer.",
    fails: true,
  },
  "misplaced-start": {
    title: "START inside a byte",
    meaning: "A START stood where a data bit or an acknowledge was due; every device then expects an address.",
    advice: "Look for a second controller that did not see the bus as busy, a reset in mid-transfer, or noise on SDA.",
    fails: true,
  },
  "misplaced-stop": {
    title: "STOP inside a byte",
    meaning: "A STOP stood where a data bit or an acknowledge was due; the byte is lost.",
    advice: "Look for a controller that aborts, an SDA that changes too close to an SCL edge, or a rise that is too slow.",
    fails: true,
  },
  "short-byte": {
    title: "Byte broken off",
    meaning: "A byte has fewer than eight bits.",
    advice: "See what ended it: the condition that follows names the place.",
    fails: true,
  },
  "void-message": {
    title: "Void message",
    meaning: "START was followed by STOP with no clock between. It is an illegal format that many devices tolerate.",
    advice: "Find the controller that gives up right after START, or a pulse on SDA while the bus was free.",
    fails: false,
  },
  spike: {
    title: "Spike",
    meaning: "A pulse shorter than tSP. Receivers with the specified input filter do not see it, and it was not acted on.",
    advice: "Harmless to devices with the filter; look for crosstalk and long ground leads where it repeats.",
    fails: false,
  },
  "sda-change-while-high": {
    title: "SDA changed while SCL was high",
    meaning: "Data must be stable while SCL is high; receivers take this for STOP and START.",
    advice: "Look for noise on SDA, or a device that drives at the wrong time.",
    fails: true,
  },
  "scl-stuck-low": {
    title: "SCL stuck low",
    meaning: "Some device holds the clock low and does not let go. No clocks can free it.",
    advice: "Only a reset or a power cycle of the device that holds it helps; the last sender is where to look first.",
    fails: true,
  },
  "sda-stuck-low": {
    title: "SDA stuck low",
    meaning: "Some device holds SDA low while nobody clocks, usually a target in the middle of a read or an acknowledge.",
    advice:
      "Give nine clocks and a STOP; if SDA does not come free, reset the device. Find out who broke off the transfer before.",
    fails: true,
  },
  "bus-clear": {
    title: "Bus clear attempted",
    meaning: "A controller gave clocks to free a held SDA.",
    advice: "See on which clock SDA came free, and what left it held.",
    fails: true,
  },
  "phantom-start": {
    title: "START without a clock",
    meaning: "SDA fell while the bus was free and no clock followed, so the bus counts as busy for ever.",
    advice: "Look for a pulse from hot plugging, discharge or noise, and for controllers without a busy time-out.",
    fails: true,
  },
  "reserved-address": {
    title: "Reserved address",
    meaning: "This address has a special purpose in the specification. Using it is allowed where that purpose is never used.",
    advice: "Check that no device on this bus gives the address its special meaning.",
    fails: false,
  },
  "pec-mismatch": {
    title: "PEC wrong",
    meaning: "The packet error code does not fit the message, on a device whose other messages carry a right one.",
    advice: "A bit was changed on the way, or sender and receiver disagree about the bytes that the code covers.",
    fails: true,
  },
  "smbus-timeout": {
    title: "SMBus time-out",
    meaning: "SCL was held low for longer than SMBus allows; devices may reset their interface.",
    advice: "Find who stretches: a target that is busy, or a controller that pauses inside a transfer.",
    fails: true,
  },
  "low-swing": {
    title: "Levels short of their swing",
    meaning: "A low is not low enough, or a high not high enough, though both still cross the thresholds.",
    advice: "Check pull-ups that are too strong, series resistors, buffers with an offset, and a missing or different supply.",
    fails: true,
  },
  "slow-rise": {
    title: "Slow rise",
    meaning: "A line rises too slowly for this bus, so a 1 may be read as a 0.",
    advice: "Use a smaller pull-up, down to Rp(min), or less capacitance; see the pull-up range of the levels view.",
    fails: true,
  },
  "between-thresholds": {
    title: "Between the thresholds",
    meaning: "A line visited the range where receivers may see either level, without becoming one.",
    advice: "Look for crosstalk, ringing, and two drivers against each other.",
    fails: false,
  },
  "address-collision": {
    title: "Two targets on one address",
    meaning: "The zeros of data read stand at two different levels, so two devices answer.",
    advice: "Give one of them another address, or take it off the bus and read again.",
    fails: true,
  },
  "suspected-collision": {
    title: "Perhaps two targets on one address",
    meaning:
      "Data read moves as if two devices answered with different bytes. A recording of levels cannot prove it; other mechanisms may look the same.",
    advice:
      "Record volts, where two drivers show two low levels, or a drive tap at one device; or take the device off the bus and see whether the address still answers.",
    fails: false,
  },
  "runt-after-stretch": {
    title: "Runt clock after a stretch",
    meaning: "When the stretched SCL was let go, the first high was shorter than tHIGH: devices may or may not count this clock.",
    advice:
      "Look at the controller's handling of clock stretching: lower its rate, or use one that times its high from the rise it sees. From here on bits may be off by one.",
    fails: true,
  },
  "bit-slip": {
    title: "Bits slipped after a runt",
    meaning: "A clock pulse was too short for some devices, which then count one bit less than the others.",
    advice: "Look at the controller's clock after stretching, and at noise on SCL.",
    fails: true,
  },
  "look-alike": {
    title: "Looks like lost arbitration",
    meaning: "A controller may report lost arbitration here though no other controller was driving.",
    advice: "Follow the mechanism named: retrying does not cure it.",
    fails: false,
  },
};
