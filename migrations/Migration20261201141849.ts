import { Migration } from '@mikro-orm/migrations';

export class Migration20261201141849 extends Migration {

  override async up(): Promise<void> {
    this.addSql(`create table "rosters" ("id" uuid not null, "team_id" uuid not null, "name" varchar(120) not null, "entries" jsonb not null, "version" int not null default 1, "updated_at" timestamptz not null, constraint "rosters_pkey" primary key ("id"));`);
    this.addSql(`alter table "rosters" add constraint "rosters_team_id_name_unique" unique ("team_id", "name");`);

    this.addSql(`create table "profiles" ("id" uuid not null, "team_id" uuid not null, "name" varchar(120) not null, "base" varchar(120) not null, "content" jsonb not null, "version" int not null default 1, "retired" boolean not null default false, "updated_at" timestamptz not null, constraint "profiles_pkey" primary key ("id"));`);
    this.addSql(`create unique index profiles_name_unique on profiles (team_id, name) where not retired;`);

    this.addSql(`create table "profile_versions" ("id" uuid not null, "profile_id" uuid not null, "version" int not null, "name" varchar(120) not null, "content" jsonb not null, "created_at" timestamptz not null, constraint "profile_versions_pkey" primary key ("id"));`);
    this.addSql(`alter table "profile_versions" add constraint "profile_versions_profile_id_version_unique" unique ("profile_id", "version");`);

    this.addSql(`create table "fault_tags" ("id" uuid not null, "team_id" uuid not null, "name" varchar(120) not null, "key" varchar(1) null, "description" varchar(500) not null default '', "position" int not null, "retired" boolean not null default false, constraint "fault_tags_pkey" primary key ("id"));`);
    this.addSql(`alter table "fault_tags" add constraint "fault_tags_team_id_name_unique" unique ("team_id", "name");`);
    this.addSql(`alter table "fault_tags" add constraint "fault_tags_team_id_key_unique" unique ("team_id", "key");`);

    this.addSql(`create table "counters" ("team_id" uuid not null, "last_case" int not null default 0, constraint "counters_pkey" primary key ("team_id"));`);

    this.addSql(`create table "cases" ("id" uuid not null, "team_id" uuid not null, "number" int not null, "title" varchar(200) not null, "status" text check ("status" in ('open', 'in-work', 'answered', 'closed')) not null default 'open', "assignee_id" uuid null, "finding" text not null default '', "settings" jsonb not null, "next_note" int not null default 1, "version" int not null default 1, "created_by_id" uuid null, "created_at" timestamptz not null, "updated_at" timestamptz not null, constraint "cases_pkey" primary key ("id"));`);
    this.addSql(`create index "cases_assignee_id_index" on "cases" ("assignee_id");`);
    this.addSql(`create index "cases_team_id_updated_at_index" on "cases" ("team_id", "updated_at");`);
    this.addSql(`alter table "cases" add constraint "cases_team_id_number_unique" unique ("team_id", "number");`);

    this.addSql(`create table "shares" ("id" uuid not null, "case_id" uuid not null, "label" varchar(120) not null default '', "secret_hash" varchar(64) not null, "passphrase_hash" varchar(255) null, "view" text not null default '', "raw_allowed" boolean not null default false, "expires_at" timestamptz not null, "revoked_at" timestamptz null, "created_by_id" uuid null, "created_at" timestamptz not null, "opened" int not null default 0, "last_opened_at" timestamptz null, constraint "shares_pkey" primary key ("id"));`);
    this.addSql(`create index "shares_case_id_index" on "shares" ("case_id");`);
    this.addSql(`alter table "shares" add constraint "shares_secret_hash_unique" unique ("secret_hash");`);

    this.addSql(`create table "events" ("id" uuid not null, "case_id" uuid not null, "actor_id" uuid null, "kind" text check ("kind" in ('case.created', 'case.edited', 'capture.added', 'capture.analysed', 'capture.removed', 'note.added', 'note.edited', 'note.removed', 'tag.added', 'tag.removed', 'share.created', 'share.revoked', 'share.edited')) not null, "words" varchar(400) not null, "before" jsonb null, "after" jsonb null, "case_version" int null, "at" timestamptz not null, constraint "events_pkey" primary key ("id"));`);
    this.addSql(`create index "events_case_id_at_index" on "events" ("case_id", "at");`);

    this.addSql(`create table "captures" ("id" uuid not null, "case_id" uuid not null, "ordinal" int not null, "name" varchar(255) not null, "size" bigint not null, "sha256" varchar(64) not null, "key" varchar(500) not null, "read" jsonb not null, "archive_key" varchar(500) null, "archive_size" bigint null, "timebase" jsonb null, "summary" jsonb null, "verdict" text check ("verdict" in ('pass', 'fail', 'undecided')) null, "transactions" int not null default 0, "faults" int not null default 0, "contests" int not null default 0, "uploaded_by_id" uuid null, "created_at" timestamptz not null, constraint "captures_pkey" primary key ("id"));`);
    this.addSql(`alter table "captures" add constraint "captures_key_unique" unique ("key");`);
    this.addSql(`alter table "captures" add constraint "captures_case_id_ordinal_unique" unique ("case_id", "ordinal");`);

    this.addSql(`create table "uploads" ("id" uuid not null, "case_id" uuid not null, "owner_id" uuid not null, "name" varchar(255) not null, "size" bigint not null, "part_size" int not null, "parts" int not null, "key" varchar(500) not null, "storage_id" varchar(1024) not null, "checksums" jsonb not null, "state" text check ("state" in ('open', 'checking', 'complete', 'refused', 'cancelled')) not null default 'open', "capture_id" uuid null, "created_at" timestamptz not null, "touched_at" timestamptz not null, constraint "uploads_pkey" primary key ("id"));`);
    this.addSql(`create index "uploads_case_id_index" on "uploads" ("case_id");`);
    this.addSql(`alter table "uploads" add constraint "uploads_key_unique" unique ("key");`);
    this.addSql(`create index "uploads_owner_id_state_index" on "uploads" ("owner_id", "state");`);
    this.addSql(`create index "uploads_state_touched_at_index" on "uploads" ("state", "touched_at");`);

    this.addSql(`create table "tags" ("id" uuid not null, "capture_id" uuid not null, "fault_tag_id" uuid not null, "anchor" jsonb not null, "place" varchar(60) not null, "remark" varchar(500) not null default '', "author_id" uuid null, "created_at" timestamptz not null, constraint "tags_pkey" primary key ("id"));`);
    this.addSql(`create index "tags_fault_tag_id_index" on "tags" ("fault_tag_id");`);
    this.addSql(`alter table "tags" add constraint "tags_capture_id_place_fault_tag_id_unique" unique ("capture_id", "place", "fault_tag_id");`);

    this.addSql(`create table "notes" ("id" uuid not null, "case_id" uuid not null, "capture_id" uuid null, "number" int not null, "anchor" jsonb not null, "text" text not null, "author_id" uuid null, "version" int not null default 1, "created_at" timestamptz not null, "edited_at" timestamptz not null, constraint "notes_pkey" primary key ("id"));`);
    this.addSql(`create index "notes_capture_id_index" on "notes" ("capture_id");`);
    this.addSql(`alter table "notes" add constraint "notes_case_id_number_unique" unique ("case_id", "number");`);

    this.addSql(`alter table "rosters" add constraint "rosters_team_id_foreign" foreign key ("team_id") references "teams" ("id") on update cascade on delete cascade;`);

    this.addSql(`alter table "profiles" add constraint "profiles_team_id_foreign" foreign key ("team_id") references "teams" ("id") on update cascade on delete cascade;`);

    this.addSql(`alter table "profile_versions" add constraint "profile_versions_profile_id_foreign" foreign key ("profile_id") references "profiles" ("id") on update cascade on delete cascade;`);

    this.addSql(`alter table "fault_tags" add constraint "fault_tags_team_id_foreign" foreign key ("team_id") references "teams" ("id") on update cascade on delete cascade;`);

    this.addSql(`alter table "counters" add constraint "counters_team_id_foreign" foreign key ("team_id") references "teams" ("id") on update cascade on delete cascade;`);

    this.addSql(`alter table "cases" add constraint "cases_team_id_foreign" foreign key ("team_id") references "teams" ("id") on update cascade on delete cascade;`);
    this.addSql(`alter table "cases" add constraint "cases_assignee_id_foreign" foreign key ("assignee_id") references "users" ("id") on update cascade on delete set null;`);
    this.addSql(`alter table "cases" add constraint "cases_created_by_id_foreign" foreign key ("created_by_id") references "users" ("id") on update cascade on delete set null;`);

    this.addSql(`alter table "shares" add constraint "shares_case_id_foreign" foreign key ("case_id") references "cases" ("id") on update cascade on delete cascade;`);
    this.addSql(`alter table "shares" add constraint "shares_created_by_id_foreign" foreign key ("created_by_id") references "users" ("id") on update cascade on delete set null;`);

    this.addSql(`alter table "events" add constraint "events_case_id_foreign" foreign key ("case_id") references "cases" ("id") on update cascade on delete cascade;`);
    this.addSql(`alter table "events" add constraint "events_actor_id_foreign" foreign key ("actor_id") references "users" ("id") on update cascade on delete set null;`);

    this.addSql(`alter table "captures" add constraint "captures_case_id_foreign" foreign key ("case_id") references "cases" ("id") on update cascade on delete cascade;`);
    this.addSql(`alter table "captures" add constraint "captures_uploaded_by_id_foreign" foreign key ("uploaded_by_id") references "users" ("id") on update cascade on delete set null;`);

    this.addSql(`alter table "uploads" add constraint "uploads_case_id_foreign" foreign key ("case_id") references "cases" ("id") on update cascade on delete cascade;`);
    this.addSql(`alter table "uploads" add constraint "uploads_owner_id_foreign" foreign key ("owner_id") references "users" ("id") on update cascade on delete cascade;`);
    this.addSql(`alter table "uploads" add constraint "uploads_capture_id_foreign" foreign key ("capture_id") references "captures" ("id") on update cascade on delete set null;`);

    this.addSql(`alter table "tags" add constraint "tags_capture_id_foreign" foreign key ("capture_id") references "captures" ("id") on update cascade on delete cascade;`);
    this.addSql(`alter table "tags" add constraint "tags_fault_tag_id_foreign" foreign key ("fault_tag_id") references "fault_tags" ("id") on update cascade on delete cascade;`);
    this.addSql(`alter table "tags" add constraint "tags_author_id_foreign" foreign key ("author_id") references "users" ("id") on update cascade on delete set null;`);

    this.addSql(`alter table "notes" add constraint "notes_case_id_foreign" foreign key ("case_id") references "cases" ("id") on update cascade on delete cascade;`);
    this.addSql(`alter table "notes" add constraint "notes_capture_id_foreign" foreign key ("capture_id") references "captures" ("id") on update cascade on delete cascade;`);
    this.addSql(`alter table "notes" add constraint "notes_author_id_foreign" foreign key ("author_id") references "users" ("id") on update cascade on delete set null;`);
  }

  override async down(): Promise<void> {
    this.addSql(`alter table "profile_versions" drop constraint "profile_versions_profile_id_foreign";`);

    this.addSql(`alter table "tags" drop constraint "tags_fault_tag_id_foreign";`);

    this.addSql(`alter table "shares" drop constraint "shares_case_id_foreign";`);

    this.addSql(`alter table "events" drop constraint "events_case_id_foreign";`);

    this.addSql(`alter table "captures" drop constraint "captures_case_id_foreign";`);

    this.addSql(`alter table "uploads" drop constraint "uploads_case_id_foreign";`);

    this.addSql(`alter table "notes" drop constraint "notes_case_id_foreign";`);

    this.addSql(`alter table "uploads" drop constraint "uploads_capture_id_foreign";`);

    this.addSql(`alter table "tags" drop constraint "tags_capture_id_foreign";`);

    this.addSql(`alter table "notes" drop constraint "notes_capture_id_foreign";`);

    this.addSql(`drop table if exists "rosters" cascade;`);

    this.addSql(`drop table if exists "profiles" cascade;`);

    this.addSql(`drop table if exists "profile_versions" cascade;`);

    this.addSql(`drop table if exists "fault_tags" cascade;`);

    this.addSql(`drop table if exists "counters" cascade;`);

    this.addSql(`drop table if exists "cases" cascade;`);

    this.addSql(`drop table if exists "shares" cascade;`);

    this.addSql(`drop table if exists "events" cascade;`);

    this.addSql(`drop table if exists "captures" cascade;`);

    this.addSql(`drop table if exists "uploads" cascade;`);

    this.addSql(`drop table if exists "tags" cascade;`);

    this.addSql(`drop table if exists "notes" cascade;`);
  }

}
