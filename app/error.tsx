"use client";

import { Button } from "@/components/ui/Button";

export default function Failure({ error, reset }: { error: Error & { digest?: string }; reset: () => void }) {
  return (
    <main role="alert" className="mx-auto max-w-[90rem] px-4 py-10 sm:px-10">
      <h1 className="font-serif text-head">This page broke. That is our fault.</h1>
      <p className="mt-3 max-w-[62ch] font-serif text-lede">
        What was saved is safe. Try again; if it breaks again, please send us what you did
        {error.digest ? (
          <>
            {" "}
            and this number: <code>{error.digest}</code>
          </>
        ) : null}
        .
      </p>
      <div className="mt-6">
        <Button look="solid" onClick={reset}>
          Try again
        </Button>
      </div>
    </main>
  );
}
