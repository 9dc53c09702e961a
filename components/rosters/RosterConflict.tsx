import { Button } from "@/components/ui/Button";
import { Notice } from "@/components/ui/Notice";
import type { RosterView } from "@/lib/case/catalogue";
import { writeRoster } from "@/lib/diagnosis/roster";

export interface RosterConflictProps {
  mine: Pick<RosterView, "name" | "entries">;
  theirs: RosterView;
  onMine: () => void;
  onTheirs: () => void;
}

/** Lines of a roster, to compare: what only one of the two has is what differs. */
function linesOf({ name, entries }: Pick<RosterView, "name" | "entries">): string[] {
  const [, ...lines] = writeRoster(entries).trimEnd().split("\r\n");
  return [`name: ${name}`, ...lines];
}

/** Somebody saved meanwhile: both versions until this person has chosen. Nothing was overwritten. */
export function RosterConflict({ mine, theirs, onMine, onTheirs }: RosterConflictProps) {
  const [own, other] = [linesOf(mine), linesOf(theirs)];
  return (
    <div className="mt-5">
      <Notice
        kind="broken"
        title="Somebody else changed this roster meanwhile"
        actions={
          <>
            <Button look="solid" onClick={onMine}>
              Save mine over it
            </Button>
            <Button onClick={onTheirs}>Take theirs</Button>
          </>
        }
      >
        <p>Nothing was overwritten. Lines that only one of the two has:</p>
        <div className="mt-2 grid gap-5 sm:grid-cols-2">
          <Lines label="Yours" lines={own.filter((line) => !other.includes(line))} />
          <Lines label={`Theirs, version ${theirs.version}`} lines={other.filter((line) => !own.includes(line))} />
        </div>
      </Notice>
    </div>
  );
}

function Lines({ label, lines }: { label: string; lines: readonly string[] }) {
  return (
    <div>
      <p className="font-sans text-label text-quiet">{label}</p>
      <pre className="mt-1 max-h-64 select-text overflow-auto border-t border-hairline pt-1 font-mono text-hex">
        {lines.length === 0 ? "nothing else" : lines.join("\n")}
      </pre>
    </div>
  );
}
