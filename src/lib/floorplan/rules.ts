import { isSimplePolygon, signedArea } from '#lib/geometry/index.ts';
import { ITEM_LISTS, LIST_LENGTHS, type Floorplan, type ItemList } from './document.ts';
import { itemPath, type Problem } from './problems.ts';
import { toNm, type OutlineUm } from './primitives.ts';

/**
 * What the shapes of single items cannot say: ids are unique, references lead somewhere of the
 * right kind, outlines do not cross themselves. Returns all problems.
 */
export function checkRules(floorplan: Floorplan): Problem[] {
	return [
		...uniqueIds(floorplan),
		...outlines(floorplan),
		...layersAndVias(floorplan),
		...netReferences(floorplan),
		...regulatorReferences(floorplan),
		...blockReferences(floorplan),
		...conditionReferences(floorplan)
	];
}

/** A list that is too short or too long; parsing checks this too, for documents as a whole. */
export function lengthProblem(list: ItemList, length: number): Problem[] {
	const [least, most] = LIST_LENGTHS[list];
	if (length >= least && length <= most) return [];
	return [{ path: list, message: `${length} items (expected ${least} to ${most})` }];
}

export function checkListLengths(floorplan: Floorplan): Problem[] {
	return ITEM_LISTS.flatMap((list) => lengthProblem(list, floorplan[list].length));
}

function quoted(ids: readonly string[]): string {
	return ids.length > 0
		? ids
				.slice(0, 8)
				.map((id) => `"${id}"`)
				.join(', ')
		: 'none defined';
}

function uniqueIds(floorplan: Floorplan): Problem[] {
	return ITEM_LISTS.flatMap((list) => {
		const first = new Map<string, number>();
		return floorplan[list].flatMap(({ id }, index): Problem[] => {
			const earlier = first.get(id);
			if (earlier === undefined) {
				first.set(id, index);
				return [];
			}
			return [
				{
					path: `${itemPath(list, index, id)}.id`,
					message: `id is used by ${list}[${earlier}] too (expected an id of its own)`
				}
			];
		});
	});
}

function outlineProblem(path: string, outline: OutlineUm): Problem[] {
	// In whole nanometres the test is exact.
	const outlineNm = outline.map(([x, y]): [number, number] => [toNm(x), toNm(y)]);
	if (!isSimplePolygon(outlineNm)) {
		return [{ path, message: 'outline crosses or touches itself (expected a simple polygon)' }];
	}
	return signedArea(outlineNm) === 0
		? [{ path, message: 'outline has no area (expected a polygon with area)' }]
		: [];
}

/** Outlines already judged: they are immutable, and an edit touches few of them. */
const judged = new WeakMap<OutlineUm, boolean>();

function outlines({ die, straps, blocks, keepouts }: Floorplan): Problem[] {
	const all: [path: () => string, outline: OutlineUm | undefined][] = [
		[() => 'die.outline', die.outline],
		...straps.map(
			({ id, region }, i) =>
				[() => `${itemPath('straps', i, id)}.region`, region] as [
					() => string,
					OutlineUm | undefined
				]
		),
		...blocks.map(
			({ id, outline }, i) =>
				[() => `${itemPath('blocks', i, id)}.outline`, outline] as [() => string, OutlineUm]
		),
		...keepouts.map(
			({ id, outline }, i) =>
				[() => `${itemPath('keepouts', i, id)}.outline`, outline] as [() => string, OutlineUm]
		)
	];
	return all.flatMap(([path, outline]) => {
		if (!outline || judged.get(outline)) return [];
		const problems = outlineProblem(path(), outline);
		judged.set(outline, problems.length === 0);
		return problems;
	});
}

function layersAndVias({ layers, vias, straps, feeds, keepouts }: Floorplan): Problem[] {
	const ids = layers.map(({ id }) => id);
	const index = new Map(ids.map((id, i) => [id, i]));
	const problems: Problem[] = [];
	const requireLayer = (path: string, id: string) => {
		if (!index.has(id)) {
			problems.push({
				path,
				message: `layer "${id}" does not exist (expected one of ${quoted(ids)})`
			});
		}
	};
	vias.forEach((via, i) => {
		const path = itemPath('vias', i, via.id);
		requireLayer(`${path}.lower`, via.lower);
		requireLayer(`${path}.upper`, via.upper);
		const lower = index.get(via.lower);
		const upper = index.get(via.upper);
		if (lower === undefined || upper === undefined) return;
		if (lower >= upper) {
			problems.push({
				path: `${path}.upper`,
				message: `"${via.upper}" is not above "${via.lower}" (expected a higher layer)`
			});
		} else if (layers[lower].direction === layers[upper].direction) {
			problems.push({
				path,
				message: `"${via.lower}" and "${via.upper}" are both ${layers[lower].direction} (expected crossing directions)`
			});
		}
	});
	straps.forEach((strap, i) =>
		requireLayer(`${itemPath('straps', i, strap.id)}.layer`, strap.layer)
	);
	feeds.forEach((feed, i) => {
		if (feed.layer !== undefined)
			requireLayer(`${itemPath('feeds', i, feed.id)}.layer`, feed.layer);
	});
	keepouts.forEach((keepout, i) =>
		keepout.layers?.forEach((layer, k) =>
			requireLayer(`${itemPath('keepouts', i, keepout.id)}.layers[${k}]`, layer)
		)
	);
	return problems;
}

type Kind = Floorplan['nets'][number]['kind'];

/** A problem where `id` is not a net of one of the kinds. */
function netProblem(
	{ nets }: Floorplan,
	path: string,
	id: string,
	kinds: readonly Kind[]
): Problem[] {
	const net = nets.find((candidate) => candidate.id === id);
	const wanted = `${/^[aeiou]/.test(kinds[0]) ? 'an' : 'a'} ${kinds.join(' or ')} net`;
	if (!net) {
		const fitting = nets
			.filter(({ kind }) => kinds.includes(kind))
			.map((candidate) => candidate.id);
		return [
			{ path, message: `net "${id}" does not exist (expected ${wanted}: ${quoted(fitting)})` }
		];
	}
	return kinds.includes(net.kind)
		? []
		: [{ path, message: `net "${id}" is ${net.kind} (expected ${wanted})` }];
}

function netReferences(floorplan: Floorplan): Problem[] {
	const { nets, straps, feeds } = floorplan;
	const problems: Problem[] = [];
	const grounds = nets.flatMap(({ id, kind }, i) => (kind === 'ground' ? [{ id, i }] : []));
	for (const { id, i } of grounds.slice(1)) {
		problems.push({
			path: itemPath('nets', i, id),
			message: `a second ground net beside "${grounds[0].id}" (expected at most one)`
		});
	}
	nets.forEach((net, i) => {
		if (net.senseLoop && net.kind !== 'regulated') {
			problems.push({
				path: `${itemPath('nets', i, net.id)}.senseLoop`,
				message: `a sense loop on an ${net.kind} net (expected on regulated nets only)`
			});
		}
	});
	straps.forEach(({ id, net }, i) => {
		problems.push(
			...netProblem(floorplan, `${itemPath('straps', i, id)}.net`, net, [
				'input',
				'regulated',
				'ground'
			])
		);
	});
	feeds.forEach(({ id, net }, i) => {
		problems.push(
			...netProblem(floorplan, `${itemPath('feeds', i, id)}.net`, net, ['input', 'ground'])
		);
	});
	return problems;
}

function regulatorReferences(floorplan: Floorplan): Problem[] {
	const cells = new Set(floorplan.cells.map(({ id }) => id));
	return floorplan.regulators.flatMap(({ id, cell, input, output }, i) => {
		const path = itemPath('regulators', i, id);
		const problems = netProblem(floorplan, `${path}.output`, output, ['regulated']);
		if (input !== null) problems.push(...netProblem(floorplan, `${path}.input`, input, ['input']));
		if (!cells.has(cell)) {
			problems.push({
				path: `${path}.cell`,
				message: `cell "${cell}" does not exist (expected one of ${quoted([...cells])})`
			});
		}
		return problems;
	});
}

function blockReferences(floorplan: Floorplan): Problem[] {
	const modes = floorplan.modes.map(({ id }) => id);
	return floorplan.blocks.flatMap(({ id, net, amps }, i) => {
		const path = itemPath('blocks', i, id);
		return [
			...netProblem(floorplan, `${path}.net`, net, ['regulated', 'input']),
			...Object.keys(amps)
				.filter((mode) => !modes.includes(mode))
				.map((mode) => ({
					path: `${path}.amps.${mode}`,
					message: `mode "${mode}" does not exist (expected one of ${quoted(modes)})`
				}))
		];
	});
}

function conditionReferences(floorplan: Floorplan): Problem[] {
	const { modes, limits, nets, blocks } = floorplan;
	const netIds = nets.map(({ id }) => id);
	const blockIds = new Set(blocks.map(({ id }) => id));
	return [
		...modes.flatMap((mode, i) =>
			Object.keys(mode.inputVolts ?? {}).flatMap((net) =>
				netProblem(floorplan, `${itemPath('modes', i, mode.id)}.inputVolts.${net}`, net, ['input'])
			)
		),
		...Object.keys(limits.overrides?.nets ?? {})
			.filter((id) => !netIds.includes(id))
			.map((id) => ({
				path: `limits.overrides.nets.${id}`,
				message: `net "${id}" does not exist (expected one of ${quoted(netIds)})`
			})),
		...Object.keys(limits.overrides?.blocks ?? {})
			.filter((id) => !blockIds.has(id))
			.map((id) => ({
				path: `limits.overrides.blocks.${id}`,
				message: `block "${id}" does not exist (expected the id of a block)`
			}))
	];
}
