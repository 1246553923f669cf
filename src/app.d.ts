import type { Actor } from '#lib/server/audit.ts';
import type { Session } from '#lib/server/auth/session.ts';
import type { Problem } from '#lib/server/problem.ts';

declare global {
	namespace App {
		interface Error {
			message: string;
			/** Id of the request, for questions to an administrator. */
			requestId?: string;
		}
		interface Locals {
			requestId: string;
			session: Session | null;
			/** Whoever is signed in, as services want to know them. */
			actor: Actor | null;
			/** Why it could not be found out who is signed in. */
			unavailable: Problem | null;
		}
	}
}

export {};
