import { Migration } from '@mikro-orm/migrations';

export class Migration20261201144145 extends Migration {

  override async up(): Promise<void> {
    this.addSql(`alter table "captures" add column "log" text null;`);
  }

  override async down(): Promise<void> {
    this.addSql(`alter table "captures" drop column "log";`);
  }

}
