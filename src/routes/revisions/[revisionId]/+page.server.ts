import { database } from '#lib/server/db/client.ts';
import { requireActor } from '#lib/server/guard.ts';
import { getSignedIn } from '#lib/server/services/team.ts';
import type { PageServerLoad } from './$types';

/** Only who is signed in; what they may see of the revision the API decides. */
export const load: PageServerLoad = (event) => getSignedIn(database(), requireActor(event));
