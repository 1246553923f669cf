import type { Handle } from './db/client.ts';
import { auditEvents } from './db/schema/index.ts';

/** Who acts, for the audit trail and for permissions. */
export interface Actor {
	readonly userId: string;
	readonly teamId: string;
	readonly isTeamAdmin: boolean;
	readonly name: string;
	readonly requestId: string;
}

export interface AuditEntry {
	readonly teamId: string | null;
	readonly userId: string | null;
	readonly requestId: string;
	/** What was done, as `object.verb`. */
	readonly action: string;
	readonly objectKind:
		'user' | 'team' | 'project' | 'floorplan' | 'job' | 'result' | 'revision' | 'thread';
	readonly objectId: string;
	readonly outcome?: 'done' | 'refused';
	readonly detail?: Record<string, unknown>;
}

/** Writes the audit trail; within the transaction of the act itself where there is one. */
export async function audit(db: Handle, entry: AuditEntry): Promise<void> {
	await db.insert(auditEvents).values({ outcome: 'done', ...entry });
}
