import { Migration } from '@mikro-orm/migrations';

export class Migration20261201141505 extends Migration {

  override async up(): Promise<void> {
    this.addSql(`create table "teams" ("id" uuid not null, "name" varchar(120) not null, "created_at" timestamptz not null, constraint "teams_pkey" primary key ("id"));`);

    this.addSql(`create table "throttles" ("key" varchar(120) not null, "count" int not null, "ends_at" timestamptz not null, constraint "throttles_pkey" primary key ("key"));`);
    this.addSql(`create index "throttles_ends_at_index" on "throttles" ("ends_at");`);

    this.addSql(`create table "users" ("id" uuid not null, "email" varchar(254) not null, "name" varchar(120) not null, "password_hash" varchar(255) not null, "created_at" timestamptz not null, constraint "users_pkey" primary key ("id"));`);
    this.addSql(`alter table "users" add constraint "users_email_unique" unique ("email");`);

    this.addSql(`create table "sessions" ("id" varchar(64) not null, "user_id" uuid not null, "team_id" uuid null, "agent" varchar(300) not null, "created_at" timestamptz not null, "expires_at" timestamptz not null, constraint "sessions_pkey" primary key ("id"));`);
    this.addSql(`create index "sessions_user_id_index" on "sessions" ("user_id");`);
    this.addSql(`create index "sessions_expires_at_index" on "sessions" ("expires_at");`);

    this.addSql(`create table "resets" ("token_hash" varchar(64) not null, "user_id" uuid not null, "created_at" timestamptz not null, "expires_at" timestamptz not null, constraint "resets_pkey" primary key ("token_hash"));`);
    this.addSql(`create index "resets_user_id_index" on "resets" ("user_id");`);

    this.addSql(`create table "members" ("id" uuid not null, "team_id" uuid not null, "user_id" uuid not null, "role" text check ("role" in ('lead', 'engineer', 'technician', 'support')) not null, "joined_at" timestamptz not null, constraint "members_pkey" primary key ("id"));`);
    this.addSql(`create index "members_user_id_index" on "members" ("user_id");`);
    this.addSql(`alter table "members" add constraint "members_team_id_user_id_unique" unique ("team_id", "user_id");`);

    this.addSql(`create table "invitations" ("id" uuid not null, "team_id" uuid not null, "email" varchar(254) not null, "role" text check ("role" in ('lead', 'engineer', 'technician', 'support')) not null, "token_hash" varchar(64) not null, "invited_by_id" uuid null, "created_at" timestamptz not null, "expires_at" timestamptz not null, "accepted_at" timestamptz null, "revoked_at" timestamptz null, constraint "invitations_pkey" primary key ("id"));`);
    this.addSql(`create index "invitations_team_id_index" on "invitations" ("team_id");`);
    this.addSql(`alter table "invitations" add constraint "invitations_token_hash_unique" unique ("token_hash");`);

    this.addSql(`create table "audits" ("id" uuid not null, "team_id" uuid not null, "actor_id" uuid null, "actor_name" varchar(120) not null, "event" varchar(60) not null, "subject" varchar(120) not null, "detail" jsonb not null, "at" timestamptz not null, constraint "audits_pkey" primary key ("id"));`);
    this.addSql(`create index "audits_team_id_at_index" on "audits" ("team_id", "at");`);

    this.addSql(`alter table "sessions" add constraint "sessions_user_id_foreign" foreign key ("user_id") references "users" ("id") on update cascade on delete cascade;`);
    this.addSql(`alter table "sessions" add constraint "sessions_team_id_foreign" foreign key ("team_id") references "teams" ("id") on update cascade on delete set null;`);

    this.addSql(`alter table "resets" add constraint "resets_user_id_foreign" foreign key ("user_id") references "users" ("id") on update cascade on delete cascade;`);

    this.addSql(`alter table "members" add constraint "members_team_id_foreign" foreign key ("team_id") references "teams" ("id") on update cascade on delete cascade;`);
    this.addSql(`alter table "members" add constraint "members_user_id_foreign" foreign key ("user_id") references "users" ("id") on update cascade on delete cascade;`);

    this.addSql(`alter table "invitations" add constraint "invitations_team_id_foreign" foreign key ("team_id") references "teams" ("id") on update cascade on delete cascade;`);
    this.addSql(`alter table "invitations" add constraint "invitations_invited_by_id_foreign" foreign key ("invited_by_id") references "users" ("id") on update cascade on delete set null;`);

    this.addSql(`alter table "audits" add constraint "audits_team_id_foreign" foreign key ("team_id") references "teams" ("id") on update cascade on delete cascade;`);
    this.addSql(`alter table "audits" add constraint "audits_actor_id_foreign" foreign key ("actor_id") references "users" ("id") on update cascade on delete set null;`);
  }

  override async down(): Promise<void> {
    this.addSql(`alter table "sessions" drop constraint "sessions_team_id_foreign";`);

    this.addSql(`alter table "members" drop constraint "members_team_id_foreign";`);

    this.addSql(`alter table "invitations" drop constraint "invitations_team_id_foreign";`);

    this.addSql(`alter table "audits" drop constraint "audits_team_id_foreign";`);

    this.addSql(`alter table "sessions" drop constraint "sessions_user_id_foreign";`);

    this.addSql(`alter table "resets" drop constraint "resets_user_id_foreign";`);

    this.addSql(`alter table "members" drop constraint "members_user_id_foreign";`);

    this.addSql(`alter table "invitations" drop constraint "invitations_invited_by_id_foreign";`);

    this.addSql(`alter table "audits" drop constraint "audits_actor_id_foreign";`);

    this.addSql(`drop table if exists "teams" cascade;`);

    this.addSql(`drop table if exists "throttles" cascade;`);

    this.addSql(`drop table if exists "users" cascade;`);

    this.addSql(`drop table if exists "sessions" cascade;`);

    this.addSql(`drop table if exists "resets" cascade;`);

    this.addSql(`drop table if exists "members" cascade;`);

    this.addSql(`drop table if exists "invitations" cascade;`);

    this.addSql(`drop table if exists "audits" cascade;`);
  }

}
