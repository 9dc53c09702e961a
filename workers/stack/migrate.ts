// In: DATABASE_URL. Out: the database at the newest migration. A process of its own, as the ORM's migrator wants plain Node.

import { MikroORM } from "@mikro-orm/postgresql";
import { ormConfig } from "@/mikro-orm.config";

const orm = await MikroORM.init(ormConfig());
try {
  const done = await orm.getMigrator().up();
  console.log(done.length ? `Applied ${done.length} migration(s).` : "The database is up to date.");
} finally {
  await orm.close();
}
