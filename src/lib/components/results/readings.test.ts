import { describe, expect, it } from 'vitest';
import type { Finding, NetResult, ResultFile, Spot } from '#lib/results/index.ts';
import { groupFindings, marginWords, readRails, summarise } from './readings.ts';

function net(id: string, kind: NetResult['kind'], worstDropV: number): NetResult {
	return {
		id,
		kind,
		nominalV: 1,
		minV: 1 - worstDropV,
		maxV: 1,
		worstDropV,
		netDropV: worstDropV,
		groundRiseV: 0,
		worstRiseV: 0,
		worst: { xUm: 12.4, yUm: 7.6, layer: 'M1', block: id === 'vdd_b' ? 'core' : null },
		loadA: 1,
		sharingSpread: null
	};
}

function spot(netId: string, dropV: number, limitV: number | null): Spot {
	return {
		net: netId,
		xUm: 0,
		yUm: 0,
		layer: 'M1',
		block: null,
		dropV,
		netDropV: dropV,
		groundRiseV: 0,
		limitV,
		marginV: limitV === null ? null : limitV - dropV
	};
}

function finding(kind: Finding['kind'], subject: string): Finding {
	return { kind, list: 'regulators', subject, value: 2, limit: 1, unit: 'A', message: subject };
}

function resultOf(parts: Partial<ResultFile>): ResultFile {
	return { nets: [], spots: [], blocks: [], findings: [], ...parts } as unknown as ResultFile;
}

describe('readRails', () => {
	it('takes the least margin over blocks and spots of a net, and leaves others out', () => {
		const rails = readRails(
			resultOf({
				nets: [net('vin', 'input', 0.01), net('vdd_a', 'regulated', 0.02), net('gnd', 'ground', 0)],
				spots: [spot('vdd_a', 0.02, 0.03)],
				blocks: [
					{ net: 'vdd_a', marginV: -0.005 },
					{ net: 'vdd_a', marginV: null }
				] as ResultFile['blocks']
			})
		);
		expect(
			rails.map(({ net: { id }, limitV, leastMarginV }) => [id, limitV, leastMarginV])
		).toEqual([['vdd_a', 0.03, -0.005]]);
	});
});

describe('summarise', () => {
	it('names the largest drop, its place and the count of findings', () => {
		const nets = [net('vdd_a', 'regulated', 0.01), net('vdd_b', 'regulated', 0.0305)];
		expect(summarise(resultOf({ nets, findings: [finding('headroom', 'r1')] }))).toBe(
			'The largest drop is 30.5 mV, on vdd_b in block core (x 12 µm, y 8 µm). 1 finding.'
		);
		expect(summarise(resultOf({ nets: nets.slice(0, 1) }))).toBe(
			'The largest drop is 10 mV, on vdd_a at x 12 µm, y 8 µm. Every limit is kept.'
		);
	});
});

describe('groupFindings', () => {
	it('keeps the order of kinds and of findings', () => {
		const groups = groupFindings([
			finding('headroom', 'r2'),
			finding('drop', 'b1'),
			finding('headroom', 'r1')
		]);
		expect(groups.map(({ kind, findings }) => [kind, findings.map((one) => one.subject)])).toEqual([
			['headroom', ['r2', 'r1']],
			['drop', ['b1']]
		]);
	});
});

describe('marginWords', () => {
	it('says over or left, never a sign alone', () => {
		expect(marginWords(-0.0021)).toBe('2.1 mV over');
		expect(marginWords(0.0431)).toBe('43.1 mV left');
	});
});
