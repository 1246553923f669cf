import postgres from 'postgres';
import { inject } from 'vitest';

export interface TestDatabase {
	readonly url: string;
	/** Ends whatever is still connected and removes the database. */
	drop(): Promise<void>;
}

/**
 * A migrated, empty database for one test file, cloned from a template: files cannot disturb each
 * other and may run at the same time.
 */
export async function createTestDatabase(): Promise<TestDatabase> {
	const template = new URL(inject('templateDatabase'));
	const name = `test_${crypto.randomUUID().replaceAll('-', '')}`;
	const administer = async (statement: string) => {
		const maintenance = new URL('/postgres', template);
		const sql = postgres(maintenance.href, { max: 1, onnotice: () => {} });
		try {
			await sql.unsafe(statement);
		} finally {
			await sql.end();
		}
	};
	await administer(`create database ${name} template ${template.pathname.slice(1)}`);
	return {
		url: new URL(`/${name}`, template).href,
		drop: () => administer(`drop database ${name} with (force)`)
	};
}
