import { database } from '#lib/server/db/client.ts';
import { requireActor } from '#lib/server/guard.ts';
import { getSignedIn } from '#lib/server/services/team.ts';
import type { LayoutServerLoad } from './$types';

export const load: LayoutServerLoad = async (event) => getSignedIn(database(), requireActor(event));
