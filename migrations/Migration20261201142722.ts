import { Migration } from '@mikro-orm/migrations';

export class Migration20261201142722 extends Migration {

  override async up(): Promise<void> {
    this.addSql(`alter table "profiles" rename column "content" to "changes";`);

    this.addSql(`alter table "profile_versions" add column "base" varchar(120) not null;`);
    this.addSql(`alter table "profile_versions" rename column "content" to "changes";`);
  }

  override async down(): Promise<void> {
    this.addSql(`alter table "profile_versions" drop column "base";`);

    this.addSql(`alter table "profile_versions" rename column "changes" to "content";`);

    this.addSql(`alter table "profiles" rename column "changes" to "content";`);
  }

}
