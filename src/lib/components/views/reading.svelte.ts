import { createQuery, useQueryClient } from '@tanstack/svelte-query';
import { isFinished, type ApiClient, type Job, type Solves } from '#lib/contracts/index.ts';
import { hashFloorplan } from '#lib/floorplan/index.ts';
import type { EditorState } from '#lib/editor/editor-state.svelte.ts';
import { decodeDropMap, type ResultFile } from '#lib/results/index.ts';
import { ALL_RAILS, netsOf, regulatorsById, type NetMap } from './map-view.ts';

/** Spots that carry a number on the map. */
const MOST_SPOTS = 9;

/** What is read; ids that the document does not have give way to its first ones. */
export interface ReadingChoice {
	readonly mode: string | null;
	readonly corner: string | null;
	/** Net whose map is shown, or all regulated rails at once. */
	readonly net: string | null;
}

/** Where results come from: the draft of a floorplan as it stands, or one of its revisions. */
export interface SolvesSource {
	/** Identity for the query cache. */
	readonly key: readonly string[];
	readonly read: () => Promise<Solves>;
}

/** The maps of one result, and which choice they were fetched for. */
interface FetchedMaps {
	readonly view: string;
	readonly maps: readonly NetMap[];
}

/** The id where the list has it, else the first one's. */
function known(list: readonly { readonly id: string }[], id: string | null): string {
	return list.find((one) => one.id === id)?.id ?? list[0].id;
}

/**
 * Follows which mode, corner and net of a plan is read, and what the server has for it; called
 * while a component is set up. Results and maps never change once kept, so they are fetched once;
 * those of the neighbouring modes and corners are fetched ahead, so that switching shows them at
 * once.
 */
export function followReading(
	client: ApiClient,
	source: SolvesSource,
	face: EditorState,
	first: ReadingChoice
) {
	const queries = useQueryClient();
	let choice = $state.raw(first);

	const floorplan = $derived(face.floorplan);
	/** Identity of the document as it is drawn: a result of another one is out of date. */
	const hash = $derived(hashFloorplan(floorplan));
	const mode = $derived(known(floorplan.modes, choice.mode));
	const corner = $derived(known(floorplan.corners, choice.corner));
	const net = $derived(floorplan.nets.find(({ id }) => id === choice.net)?.id ?? ALL_RAILS);
	const nets = $derived(netsOf(floorplan, net));

	const solvesKey = ['solves', ...source.key];
	const solves = createQuery(() => ({ queryKey: solvesKey, queryFn: source.read }));
	const summary = $derived(
		solves.data?.results.find((one) => one.mode === mode && one.corner === corner)
	);
	const isStale = $derived(summary !== undefined && summary.documentHash !== hash);
	const job = $derived.by(
		(): Job | null =>
			solves.data?.jobs
				.filter((one) => one.mode === mode && one.corner === corner)
				.sort((a, b) => b.createdAt.localeCompare(a.createdAt))[0] ?? null
	);

	function resultOptions(id: string) {
		return {
			queryKey: ['result', id],
			queryFn: () => client.getResult(id),
			staleTime: Infinity
		};
	}

	function mapOptions(id: string, view: string, wanted: readonly string[]) {
		return {
			queryKey: ['maps', id, ...wanted],
			queryFn: async (): Promise<FetchedMaps> => {
				const maps = await Promise.all(
					wanted.map(async (one) => ({
						net: one,
						map: decodeDropMap(await client.getMap(id, one))
					}))
				);
				return { view, maps: maps.flatMap(({ net: of, map }) => (map ? [{ net: of, map }] : [])) };
			},
			staleTime: Infinity
		};
	}

	const viewOf = (ofMode: string, ofCorner: string) => [ofMode, ofCorner, ...nets].join(' ');
	const view = $derived(viewOf(mode, corner));

	// A newer result of the same mode and corner replaces the older one without a gap; another
	// mode's figures never stand under this one's name.
	const result = createQuery(() => ({
		...resultOptions(summary?.id ?? ''),
		enabled: summary !== undefined,
		placeholderData: (before?: ResultFile) =>
			before?.mode === mode && before.corner === corner ? before : undefined
	}));
	const maps = createQuery(() => ({
		...mapOptions(summary?.id ?? '', view, nets),
		enabled: summary !== undefined,
		placeholderData: (before?: FetchedMaps) => (before?.view === view ? before : undefined)
	}));
	const shown = $derived(summary ? (result.data ?? null) : null);
	const regulators = $derived(regulatorsById(shown));
	const spots = $derived(
		(shown?.spots ?? [])
			.filter((spot) => nets.includes(spot.net))
			.sort((a, b) => b.dropV - a.dropV)
			.slice(0, MOST_SPOTS)
	);

	// One after the other, so that nothing that is looked at waits for it.
	const ahead = $derived(
		shown && maps.data
			? (solves.data?.results ?? []).filter((one) => one.mode === mode || one.corner === corner)
			: []
	);
	$effect(() => {
		const wanted = ahead.map((one) => ({ id: one.id, view: viewOf(one.mode, one.corner) }));
		void fetchAhead(wanted, nets);
	});

	async function fetchAhead(wanted: readonly { id: string; view: string }[], of: string[]) {
		for (const one of wanted) {
			await queries.prefetchQuery(resultOptions(one.id));
			await queries.prefetchQuery(mapOptions(one.id, one.view, of));
		}
	}

	return {
		get mode() {
			return mode;
		},
		get corner() {
			return corner;
		},
		get net() {
			return net;
		},
		get nets() {
			return nets;
		},
		/** Whether what is shown is of another document than the one drawn. */
		get isStale() {
			return isStale;
		},
		/** Whether there is a result of the document as it is drawn. */
		get isCurrent() {
			return summary !== undefined && !isStale;
		},
		/** Whether the server's answers are still on their way. */
		get isLoading() {
			return solves.isPending || (summary !== undefined && (!shown || maps.isPending));
		},
		/** Why the server's answers cannot be had; null while they can. */
		get error() {
			return solves.error ?? result.error ?? maps.error;
		},
		/** Newest job of the mode and corner. */
		get job() {
			return job;
		},
		get openJobs() {
			return solves.data?.jobs.filter((one) => !isFinished(one)).length ?? 0;
		},
		get result() {
			return shown;
		},
		get maps() {
			return summary ? (maps.data?.maps ?? []) : [];
		},
		/** What the result says of each regulator, by id. */
		get regulators() {
			return regulators;
		},
		/** The worst spots of the nets shown, in the order of their numbers. */
		get spots() {
			return spots;
		},
		pick(picked: Partial<ReadingChoice>): void {
			choice = { ...choice, ...picked };
		},
		/** Asks the server again what it has. */
		refresh: () => queries.invalidateQueries({ queryKey: solvesKey })
	};
}

export type FloorplanReading = ReturnType<typeof followReading>;
