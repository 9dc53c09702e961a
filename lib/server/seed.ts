import "server-only";
import { Case } from "@/entities/case";
import { Event } from "@/entities/event";
import { Member } from "@/entities/member";
import { Roster } from "@/entities/roster";
import type { Team } from "@/entities/team";
import { User } from "@/entities/user";
import { demoCaptures } from "@/fixtures/demo/captures";
import { type Role, roles } from "@/lib/case/roles";
import type { MemberViewer } from "./access/viewer";
import { createUser, foundTeam } from "./auth/account";
import { hashPassword } from "./auth/password";
import { store } from "./captures/store";
import { deleteCase } from "./cases/write";
import { type EntityManager, fork } from "./database";
import { rosterInput } from "./rosters/csv";
import { addRoster } from "./rosters/write";
import { seedCase } from "./seed-case";
import { readCatalogue } from "./tags/catalogue";

const TEAM = "Marrow Bay hatchery";
/** Known to everybody who reads this: the demo team is for a machine of one's own. */
const PASSWORD = "first low stays on";
const NAMES: Record<Role, string> = { lead: "Ines Roe", engineer: "Tomas Fry", technician: "Wanda Gill", support: "Oskar Finn" };

export interface DemoAccount {
  readonly role: Role;
  readonly email: string;
  readonly password: string;
}

/** The people of the demo team, each as the viewer in whose name things are done. */
export type DemoPeople = Readonly<Record<Role, MemberViewer>>;

const emailOf = (role: Role) => `${role}@marrow-bay.example`;

/**
 * Makes the demo team, or what is missing of it after a broken start: one account a role, the devices, one case for each
 * demo capture, read by the same engine as everybody's. Returns the accounts, for the start command to print.
 */
export async function seedDemo(): Promise<readonly DemoAccount[]> {
  await store().ensureBucket();
  const people = await gather(await fork());
  const roster = await seedRoster(await fork(), people);
  await readCatalogue(await fork(), people.lead);
  for (const [at, capture] of demoCaptures().entries()) {
    await dropUnfinished(people.lead, capture.title);
    const there = await (await fork()).count(Case, { team: people.lead.team.id, title: capture.title });
    if (there === 0) await seedCase(people, roster, capture, at);
  }
  return roles.map((role) => ({ role, email: emailOf(role), password: PASSWORD }));
}

/** A case whose making broke off: its finding, the last step, was never written. */
async function dropUnfinished(lead: MemberViewer, title: string): Promise<void> {
  const em = await fork();
  for (const row of await em.find(Case, { team: lead.team.id, title })) {
    const edits = await em.count(Event, { case: row.id, kind: "case.edited" });
    if (edits === 0) await deleteCase(await fork(), lead, row.number);
  }
}

async function gather(em: EntityManager): Promise<DemoPeople> {
  const passwordHash = await hashPassword(PASSWORD);
  const users = new Map<Role, User>();
  for (const role of roles) {
    const there = await em.findOne(User, { email: emailOf(role) });
    users.set(role, there ?? (await createUser(em, { name: NAMES[role], email: emailOf(role), passwordHash })));
  }
  const userOf = (role: Role): User => users.get(role) ?? never(role);
  const led = await em.findOne(Member, { user: userOf("lead").id, team: { name: TEAM } }, { populate: ["team"] });
  const team: Team = led?.team.getEntity() ?? (await foundTeam(em, userOf("lead"), TEAM));
  for (const role of roles) {
    const user = userOf(role);
    if (!(await em.findOne(Member, { team: team.id, user: user.id }))) em.create(Member, { team, user, role });
  }
  await em.flush();
  const viewerOf = (role: Role): MemberViewer => {
    const { id, name, email } = userOf(role);
    return { kind: "member", user: { id, name, email }, team: { id: team.id, name: team.name }, role, sessionId: null };
  };
  return {
    lead: viewerOf("lead"),
    engineer: viewerOf("engineer"),
    technician: viewerOf("technician"),
    support: viewerOf("support"),
  };
}

function never(role: Role): never {
  throw new Error(`nobody is ${role}`);
}

/** Id of the roster of the tank bus. */
async function seedRoster(em: EntityManager, { engineer }: DemoPeople): Promise<string> {
  const name = "Tank bus";
  const there = await em.findOne(Roster, { team: engineer.team.id, name });
  if (there) return there.id;
  const [first] = demoCaptures();
  return (await addRoster(em, engineer, rosterInput(name, first.roster))).id;
}
