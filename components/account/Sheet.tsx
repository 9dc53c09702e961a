import type { ReactNode } from "react";

/** One narrow column for a form: a title, a sentence, the form, and other ways below a hairline. */
export function Sheet({
  title,
  lede,
  children,
  ways,
}: {
  title: string;
  lede?: ReactNode;
  children?: ReactNode;
  ways?: ReactNode;
}) {
  return (
    <section className="mx-auto max-w-md">
      <h1 className="font-serif text-head">{title}</h1>
      {lede && <p className="mt-2 font-serif text-lede">{lede}</p>}
      {children && <div className="mt-7">{children}</div>}
      {ways && <p className="mt-8 border-t border-hairline pt-4 font-sans text-label text-quiet">{ways}</p>}
    </section>
  );
}
