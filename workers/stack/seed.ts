// In: the settings of a running stack. Out: the demo team, once. Run with --conditions=react-server, as the server's own code needs.

import { closeDatabase } from "@/lib/server/database";
import { seedDemo } from "@/lib/server/seed";

try {
  console.log(`accounts ${JSON.stringify(await seedDemo())}`);
} finally {
  await closeDatabase();
}
