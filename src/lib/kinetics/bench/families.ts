/**
 * Random networks by family, for the accuracy figures and the property test. Seeded: the same seed gives the same network.
 */
import type { LinearSystem } from '../types';

export interface RandomCase {
	family: Family;
	seed: number;
	system: LinearSystem;
	charge: Float64Array;
	timesS: Float64Array;
}

export const FAMILIES = [
	'chain',
	'tree',
	'reversible tree',
	'reversible loops',
	'irreversible loops',
	'mixed',
	'equal rates',
	'nearly equal rates',
	'nearly equal and reversible',
	'stiff 1e12',
	'stiff 1e12 with loops',
	'disconnected',
	'zero constants',
	'splitting steps'
] as const;
export type Family = (typeof FAMILIES)[number];

/** mulberry32: a small seeded generator of numbers in [0, 1). */
export function random(seed: number): () => number {
	let state = seed >>> 0;
	return () => {
		state = (state + 0x6d2b79f5) >>> 0;
		let t = state;
		t = Math.imul(t ^ (t >>> 15), t | 1);
		t ^= t + Math.imul(t ^ (t >>> 7), t | 61);
		return ((t ^ (t >>> 14)) >>> 0) / 4294967296;
	};
}

/** Builds a linear system step by step, as `linearSystem` does from a network. */
export class SystemBuilder {
	private steps = 0;
	private readonly system: LinearSystem;
	constructor(readonly n: number) {
		this.system = { n, transfers: [], outflow: new Float64Array(n), flows: [] };
	}

	step(from: number, products: [to: number, coefficient: number][], rate: number, reverse = 0): this {
		const step = this.steps++;
		this.direct(step, 'forward', from, products, rate);
		if (reverse > 0) this.direct(step, 'reverse', products[0][0], [[from, 1]], reverse);
		return this;
	}

	build(): LinearSystem {
		return this.system;
	}

	private direct(
		step: number,
		direction: 'forward' | 'reverse',
		from: number,
		products: [number, number][],
		rate: number
	): void {
		if (rate === 0) return;
		this.system.outflow[from] += rate;
		this.system.flows!.push({ step, direction, from, rate });
		for (const [to, coefficient] of products)
			this.system.transfers.push({ from, to, rate, coefficient, step, direction });
	}
}

interface Draw {
	n: number;
	next: () => number;
	int: (below: number) => number;
	rate: () => number;
}

function draw(family: Family, next: () => number): Draw {
	const n = 2 + Math.floor(next() * 11);
	const int = (below: number) => Math.floor(next() * below);
	const stiff = family.startsWith('stiff');
	const decades = stiff ? 12 : 3;
	const spread = () => 10 ** (decades * (next() - 0.5));
	const common = spread();
	const gap = 10 ** (-1 - 15 * next());
	const rate = () => {
		if (family === 'equal rates') return next() < 0.8 ? common : spread();
		if (family.startsWith('nearly equal'))
			return next() < 0.85 ? common * (1 + gap * (next() - 0.5)) : spread();
		if (family === 'zero constants' && next() < 0.3) return 0;
		return spread();
	};
	return { n, next, int, rate };
}

/** One random case. */
export function randomCase(family: Family, seed: number): RandomCase {
	const next = random(seed * 7919 + FAMILIES.indexOf(family) * 104729 + 1);
	const d = draw(family, next);
	const system = build(family, d);
	const charge = new Float64Array(d.n);
	charge[0] = 1;
	if (next() < 0.4) for (let i = 0; i < d.n; i++) charge[i] = next() < 0.5 ? next() : 0;
	if (charge.every((c) => c === 0)) charge[0] = 1;
	return { family, seed, system, charge, timesS: sampleTimes(system, next) };
}

function sampleTimes(system: LinearSystem, next: () => number): Float64Array {
	let slow = Infinity;
	let fast = 0;
	for (const { rate } of system.flows!) {
		slow = Math.min(slow, rate);
		fast = Math.max(fast, rate);
	}
	if (fast === 0) return Float64Array.from([0, 1, 1e3]);
	const low = Math.log10(1e-3 / fast);
	const high = Math.log10(1e3 / slow);
	return Float64Array.from({ length: 8 }, (_, k) => 10 ** (low + ((high - low) * (k + next() * 0.999)) / 8));
}

function build(family: Family, d: Draw): LinearSystem {
	const b = new SystemBuilder(d.n);
	switch (family) {
		case 'chain':
			return chain(b, d, 0).build();
		case 'tree':
			return tree(b, d, 0).build();
		case 'reversible tree':
			return tree(b, d, 0.8).build();
		case 'equal rates':
		case 'nearly equal rates':
			return d.next() < 0.5 ? chain(b, d, 0).build() : extra(tree(b, d, 0), d).build();
		case 'nearly equal and reversible':
			return chain(b, d, 0.5).build();
		case 'stiff 1e12':
			return tree(b, d, d.next() < 0.3 ? 0 : 0.6).build();
		case 'reversible loops':
			return balanced(b, d).build();
		case 'irreversible loops':
			return loops(b, d).build();
		case 'mixed':
		case 'zero constants':
			return extra(tree(b, d, 0.4), d).build();
		case 'stiff 1e12 with loops':
			return d.next() < 0.4 ? balanced(b, d).build() : extra(tree(b, d, 0.4), d).build();
		case 'disconnected':
			return disconnected(b, d).build();
		case 'splitting steps':
			return splitting(b, d).build();
	}
}

function chain(b: SystemBuilder, d: Draw, reversible: number): SystemBuilder {
	for (let i = 0; i + 1 < d.n; i++) b.step(i, [[i + 1, 1]], d.rate(), d.next() < reversible ? d.rate() : 0);
	if (d.next() < 0.3) b.step(d.n - 1, [], d.rate());
	return b;
}

function tree(b: SystemBuilder, d: Draw, reversible: number): SystemBuilder {
	for (let i = 1; i < d.n; i++) b.step(d.int(i), [[i, 1]], d.rate(), d.next() < reversible ? d.rate() : 0);
	if (d.next() < 0.3) b.step(d.int(d.n), [], d.rate());
	return b;
}

/** Extra one-way or reversible steps between any two species. */
function extra(b: SystemBuilder, d: Draw): SystemBuilder {
	for (let e = d.int(d.n); e > 0; e--) {
		const from = d.int(d.n);
		const to = d.int(d.n);
		if (from !== to) b.step(from, [[to, 1]], d.rate(), d.next() < 0.2 ? d.rate() : 0);
	}
	return b;
}

/** Loops whose constants obey detailed balance: free energies are drawn, then one constant per step. */
function balanced(b: SystemBuilder, d: Draw): SystemBuilder {
	const weight = Array.from({ length: d.n }, d.rate);
	const link = (i: number, j: number) => {
		const k = d.rate() / Math.max(weight[i], weight[j]);
		b.step(i, [[j, 1]], k * weight[j], k * weight[i]);
	};
	for (let i = 1; i < d.n; i++) link(d.int(i), i);
	for (let e = d.int(d.n); e > 0; e--) {
		const i = d.int(d.n);
		const j = d.int(d.n);
		if (i !== j) link(i, j);
	}
	if (d.next() < 0.3) b.step(d.int(d.n), [], d.rate());
	return b;
}

function loops(b: SystemBuilder, d: Draw): SystemBuilder {
	for (let i = 0; i < d.n; i++) b.step(i, [[(i + 1) % d.n, 1]], d.rate());
	return d.next() < 0.5 ? extra(b, d) : b;
}

function disconnected(b: SystemBuilder, d: Draw): SystemBuilder {
	const cut = 1 + d.int(d.n - 1);
	for (let i = 1; i < d.n; i++)
		if (i !== cut)
			b.step(i < cut ? d.int(i) : cut + d.int(i - cut), [[i, 1]], d.rate(), d.next() < 0.4 ? d.rate() : 0);
	return b;
}

/** A → B + C, A → 2 B, losses, and A → 2 B with B → ½ A. */
function splitting(b: SystemBuilder, d: Draw): SystemBuilder {
	for (let i = 0; i + 1 < d.n; i++) {
		const to = i + 1 + d.int(d.n - i - 1);
		const kind = d.next();
		const other = i + 1 + d.int(d.n - i - 1);
		if (kind < 0.25) b.step(i, [[to, 2]], d.rate());
		else if (kind < 0.5 && other !== to)
			b.step(
				i,
				[
					[to, 1],
					[other, 1]
				],
				d.rate()
			);
		else if (kind < 0.6) b.step(i, [], d.rate()).step(i, [[to, 1]], d.rate());
		else if (kind < 0.75) b.step(i, [[to, 2]], d.rate()).step(to, [[i, 0.5]], d.rate());
		else b.step(i, [[to, 1]], d.rate(), d.next() < 0.3 ? d.rate() : 0);
	}
	return b;
}
