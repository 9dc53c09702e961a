import Link from "next/link";
import type { ReactNode } from "react";
import { Mark } from "./Mark";
import { ThemeToggle } from "./ThemeToggle";

export interface HeaderLink {
  readonly href: string;
  readonly text: string;
}

export interface HeaderProps {
  /** Where we are, after the name: team, device, case. */
  context?: ReactNode;
  links?: readonly HeaderLink[];
  /** Further controls at the right, for instance Share or the account. */
  children?: ReactNode;
}

export function Header({ context, links = [], children }: HeaderProps) {
  return (
    <header className="border-b border-ink print:border-0">
      <div className="mx-auto flex max-w-[90rem] flex-wrap items-baseline gap-x-6 gap-y-1 px-4 py-3 sm:px-10">
        <Link href="/" className="flex items-baseline gap-2.5 font-serif text-xl no-underline">
          <Mark className="self-center" />
          Firstlow
        </Link>
        {context && <p className="order-last w-full font-sans text-label text-quiet sm:order-none sm:w-auto">{context}</p>}
        <nav aria-label="Main" className="screen-only ml-auto flex flex-wrap items-baseline gap-x-5 gap-y-1 font-sans text-label">
          {links.map((link) => (
            <Link key={link.href} href={link.href}>
              {link.text}
            </Link>
          ))}
          {children}
          <ThemeToggle />
        </nav>
      </div>
    </header>
  );
}
