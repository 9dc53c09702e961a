import type { ReactNode } from "react";
import { Header, type HeaderLink } from "@/components/header/Header";
import { SignOut } from "./SignOut";

export interface MastheadProps {
  /** Who is signed in; null for a guest. */
  person: { readonly name: string; readonly team: string | null } | null;
  /** Where we are, after the team's name. */
  context?: ReactNode;
  /** Further links, after the usual ones. */
  links?: readonly HeaderLink[];
}

/** The head of every page outside a share link: the usual ways for somebody signed in, or the ways in for a guest. */
export function Masthead({ person, context, links = [] }: MastheadProps) {
  if (!person) {
    const ways = [
      ...links,
      { href: "/help", text: "Help" },
      { href: "/sign-in", text: "Sign in" },
      { href: "/sign-up", text: "Found a team" },
    ];
    return <Header context={context} links={ways} />;
  }
  const team =
    person.team === null
      ? []
      : [
          { href: "/cases", text: "Cases" },
          { href: "/rosters", text: "Rosters" },
          { href: "/profiles", text: "Profiles" },
          { href: "/team", text: "Team" },
        ];
  const where = (
    <>
      {person.team}
      {person.team && context ? ", " : ""}
      {context}
    </>
  );
  return (
    <Header context={where} links={[...team, ...links, { href: "/help", text: "Help" }, { href: "/account", text: person.name }]}>
      <SignOut />
    </Header>
  );
}
