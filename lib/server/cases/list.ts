import "server-only";
import type { FilterQuery } from "@mikro-orm/core";
import { Case } from "@/entities/case";
import { CASE_PAGE, type CaseList, type CaseQuery, type CaseRow } from "@/lib/case/wire";
import type { MemberViewer } from "@/lib/server/access/viewer";
import { visibleCases } from "@/lib/server/access/visible";
import type { EntityManager } from "@/lib/server/database";

/** One page of the team's cases that fit the query. */
export async function listCases(em: EntityManager, viewer: MemberViewer, query: CaseQuery): Promise<CaseList> {
  const where: FilterQuery<Case> = { $and: [visibleCases(viewer), ...(await conditions(em, viewer, query))] };
  const [rows, total] = await em.findAndCount(Case, where, {
    populate: ["assignee"],
    orderBy: orders[query.sort],
    limit: CASE_PAGE,
    offset: (query.page - 1) * CASE_PAGE,
  });
  const tallies = await tally(
    em,
    rows.map((row) => row.id),
  );
  return {
    cases: rows.map((row) => caseRow(row, tallies.get(row.id) ?? nothing)),
    total,
    page: query.page,
    pages: Math.max(1, Math.ceil(total / CASE_PAGE)),
  };
}

const orders = {
  updated: { updatedAt: "desc", number: "desc" },
  number: { number: "desc" },
  title: { title: "asc", number: "asc" },
} as const;

/** What `%` and `_` mean to LIKE is not what they mean to a person. */
function literal(text: string): string {
  return `%${text.replace(/[\\%_]/g, (sign) => `\\${sign}`)}%`;
}

async function conditions(em: EntityManager, viewer: MemberViewer, query: CaseQuery): Promise<FilterQuery<Case>[]> {
  const all: FilterQuery<Case>[] = [];
  const words = query.q.replaceAll("\u0000", "").trim();
  if (words !== "") all.push(await matching(em, viewer, words));
  if (query.status.length > 0) all.push({ status: { $in: query.status } });
  if (query.assignee === "nobody") all.push({ assignee: null });
  else if (query.assignee !== "") all.push({ assignee: query.assignee === "me" ? viewer.user.id : query.assignee });
  if (query.verdict !== "") {
    const ids: { id: string }[] = await em.execute(`${worst} where team_id = ? and verdict = ?`, [viewer.team.id, query.verdict]);
    all.push({ id: { $in: ids.map(({ id }) => id) } });
  }
  return all;
}

async function matching(em: EntityManager, viewer: MemberViewer, words: string): Promise<FilterQuery<Case>> {
  const like = { $ilike: literal(words) };
  const named: { id: string }[] = await em.execute(
    `select distinct c.id from cases c join captures k on k.case_id = c.id where c.team_id = ? and k.name ilike ?`,
    [viewer.team.id, literal(words)],
  );
  const number = /^#?(\d{1,9})$/.exec(words);
  return {
    $or: [
      { title: like },
      { finding: like },
      { id: { $in: named.map(({ id }) => id) } },
      ...(number ? [{ number: Number(number[1]) }] : []),
    ],
  };
}

/** Every case with its worst verdict: one failed capture fails the case; "none" while nothing was decoded. */
const worst = `select id from (
  select c.id, c.team_id, case
    when bool_or(k.verdict = 'fail') then 'fail'
    when bool_or(k.verdict = 'undecided') then 'undecided'
    when bool_or(k.verdict = 'pass') then 'pass'
    else 'none' end as verdict
  from cases c left join captures k on k.case_id = c.id group by c.id) as judged`;

interface Tally {
  readonly captures: number;
  readonly notes: number;
  readonly tags: number;
  readonly verdict: CaseRow["verdict"];
  readonly transactions: number;
  readonly faults: number;
  readonly contests: number;
  readonly shared: boolean;
}

const nothing: Tally = { captures: 0, notes: 0, tags: 0, verdict: null, transactions: 0, faults: 0, contests: 0, shared: false };

/** What hangs below each case of one page, in one query. */
async function tally(em: EntityManager, ids: readonly string[]): Promise<ReadonlyMap<string, Tally>> {
  if (ids.length === 0) return new Map();
  const rows: (Tally & { id: string })[] = await em.execute(
    `select c.id,
       count(k.id)::int as captures,
       coalesce(sum(k.transactions), 0)::int as transactions,
       coalesce(sum(k.faults), 0)::int as faults,
       coalesce(sum(k.contests), 0)::int as contests,
       case when bool_or(k.verdict = 'fail') then 'fail'
            when bool_or(k.verdict = 'undecided') then 'undecided'
            when bool_or(k.verdict = 'pass') then 'pass' end as verdict,
       (select count(*)::int from notes n where n.case_id = c.id) as notes,
       (select count(*)::int from tags t join captures tk on tk.id = t.capture_id where tk.case_id = c.id) as tags,
       exists (select 1 from shares s where s.case_id = c.id and s.revoked_at is null and s.expires_at > now()) as shared
     from cases c left join captures k on k.case_id = c.id
     where c.id = any(?::uuid[]) group by c.id`,
    [`{${ids.join(",")}}`],
  );
  return new Map(rows.map(({ id, ...row }) => [id, row]));
}

function caseRow(row: Case, counted: Tally): CaseRow {
  const assignee = row.assignee ? row.assignee.getEntity() : null;
  return {
    number: row.number,
    title: row.title,
    status: row.status,
    assignee: assignee ? { id: assignee.id, name: assignee.name } : null,
    ...counted,
    created_at: row.createdAt.toISOString(),
    updated_at: row.updatedAt.toISOString(),
  };
}
