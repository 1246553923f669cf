/** Brings the database of DATABASE_URL to the present schema. */
import { config } from '#lib/server/config.ts';
import { migrateDatabase } from '#lib/server/db/migrate.ts';
import { runService } from './run-service.ts';

await runService('migrate', async () => {
	await migrateDatabase(config().DATABASE_URL, 'drizzle');
});
