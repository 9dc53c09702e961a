import { Button } from "@/components/ui/Button";
import { Notice } from "@/components/ui/Notice";
import { count } from "@/lib/view/format";
import type { Session } from "./session";

/** How far the reading is, as a rule that grows; and what became of it where it did not come to its end. */
export function StageLine({ session, size, name }: { session: Session; size: number; name: string }) {
  const { stage } = session;
  if (stage.is === "crashed") {
    return (
      <Notice
        kind="broken"
        title="The decoder failed. This is our fault, not your file's."
        actions={<Button onClick={session.again}>try again</Button>}
      >
        <p>
          Your file is untouched. If it fails again, please send us this line: <code>{stage.message}</code>
        </p>
      </Notice>
    );
  }
  if (stage.is === "stopped") {
    return (
      <Notice kind="warning" title="Reading was stopped" actions={<Button onClick={session.again}>read it again</Button>}>
        <p>What had been read until then is shown; nothing was concluded from it.</p>
      </Notice>
    );
  }
  if (stage.is !== "opening" && stage.is !== "reading") return null;
  const share = stage.is === "reading" && size > 0 ? Math.min(1, stage.bytes / size) : 0;
  return (
    <div className="screen-only flex items-center gap-4 font-sans text-label text-quiet" role="status">
      <progress
        value={share}
        max={1}
        aria-label={`Reading ${name}`}
        className="h-[3px] flex-1 appearance-none [&::-moz-progress-bar]:bg-accent [&::-webkit-progress-bar]:bg-hairline [&::-webkit-progress-value]:bg-accent"
      />
      <span className="tabular text-hex">{stage.is === "opening" ? "opening" : `${count(Math.floor(share * 100))} %`}</span>
      <Button look="word" onClick={session.stop}>
        stop
      </Button>
    </div>
  );
}
