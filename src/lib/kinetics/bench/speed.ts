/**
 * Speed of curves: beside SciPy on five species and 2 000 times, the redraw of a dragged slider, and how cost grows.
 */
import { sensitivities } from '../sensitivity';
import { solve } from '../solve';
import type { LinearSystem } from '../types';
import { FAMILIES, random, randomCase, SystemBuilder } from './families';
import type { BenchOptions, Log } from './main';
import { SCIPY_PROGRAM } from './scipy';

/** Best time of one call in microseconds, over about `milliseconds` after warming. */
export function bestMicroseconds(work: () => void, milliseconds: number): number {
	const warmUntil = performance.now() + milliseconds / 4;
	while (performance.now() < warmUntil) work();
	const once = performance.now();
	work();
	const batch = Math.max(1, Math.min(50, Math.round(0.2 / Math.max(1e-3, performance.now() - once))));
	let best = Infinity;
	const until = performance.now() + milliseconds;
	do {
		const start = performance.now();
		for (let i = 0; i < batch; i++) work();
		best = Math.min(best, ((performance.now() - start) * 1000) / batch);
	} while (performance.now() < until);
	return best;
}

/** The five-species isomerisation network, 1/s. */
function fiveSpecies(): LinearSystem {
	const [a, b, c, d, e] = [5.93e-5, 2.96e-5, 2.05e-5, 2.744e-4, 4e-5].map((perMin) => perMin / 60);
	return new SystemBuilder(5)
		.step(0, [[1, 1]], a)
		.step(0, [[2, 1]], b)
		.step(2, [[3, 1]], c)
		.step(2, [[4, 1]], d, e)
		.build();
}

export async function speedLines(log: Log, { quick, python }: BenchOptions): Promise<void> {
	const budget = quick ? 100 : 600;
	const system = fiveSpecies();
	const times = Float64Array.from({ length: 2000 }, (_, k) => (k * 36420 * 60) / 1999);
	const out = new Float64Array(5 * times.length);
	const charge = [100, 0, 0, 0, 0];
	// Allocating work takes the compiler a while to settle.
	const long = Math.max(budget, 600);
	const all = bestMicroseconds(() => solve(system, charge).curves(times, out), long);
	const solution = solve(system, charge);
	const curves = bestMicroseconds(() => solution.curves(times, out), long);
	log('Speed: five species (one reversible step), 2 000 equally spaced times, microseconds, best of many');
	log(`  this engine, closed form from the constants and all curves  ${all.toFixed(1)}`);
	log(`  this engine, curves of a closed form at hand                ${curves.toFixed(1)}`);
	await besideScipy(log, python, all, curves);
	redrawLines(log, budget);
}

async function besideScipy(
	log: Log,
	python: BenchOptions['python'],
	all: number,
	curves: number
): Promise<void> {
	const answer = (await python?.(SCIPY_PROGRAM)) ?? null;
	if (answer === null) {
		log('  python3 with SciPy is not on this machine: no comparison');
		return;
	}
	const theirs = JSON.parse(answer) as { versions: string; expm: number; eig: number };
	const ratio = (value: number) =>
		`${(value / all).toFixed(1)} × (curves alone ${(value / curves).toFixed(1)} ×)`;
	log(`  ${theirs.versions}:`);
	log(`  scipy.linalg.expm per time ${theirs.expm.toFixed(0)}: ratio ${ratio(theirs.expm)}`);
	log(`  numpy.linalg.eig once, vectorised ${theirs.eig.toFixed(1)}: ratio ${ratio(theirs.eig)}`);
}

/** Closed form and 400 times of 12 species, one network of each family: what a slider costs a frame. */
function redrawLines(log: Log, budget: number): void {
	log('Redraw: 12 species × 400 times from the constants, milliseconds (asked for: 4)');
	for (const family of FAMILIES) {
		let seed = 1;
		while (seed < 400 && randomCase(family, seed).system.n !== 12) seed++;
		const { system, charge } = randomCase(family, seed);
		const slowest = Math.min(...system.flows!.map((flow) => flow.rate));
		const times = Float64Array.from({ length: 400 }, (_, k) => (k * 5) / slowest / 400);
		const out = new Float64Array(12 * 400);
		const micro = bestMicroseconds(() => solve(system, charge).curves(times, out), budget / 4);
		log(
			`  ${family.padEnd(28)} ${(micro / 1000).toFixed(2)}   ${solve(system, charge).method}, seed ${seed}`
		);
	}
}

const SIZES = [2, 4, 8, 16, 32, 64];

/** Cost against the number of species: a random tree, every third step reversible. */
export function growthLines(log: Log, quick: boolean): void {
	const budget = quick ? 40 : 250;
	log('Growth with the number of species (tree, every third step reversible), microseconds');
	log('species   closed form   400 times   one time   derivatives by all constants at 10 times');
	for (const n of SIZES) {
		const system = growingTree(n);
		const charge = Float64Array.from({ length: n }, (_, i) => (i === 0 ? 1 : 0));
		const times = Float64Array.from({ length: 400 }, (_, k) => k * 0.05);
		const few = times.filter((_, k) => k > 0 && k % 40 === 0);
		const out = new Float64Array(n * 400);
		const one = new Float64Array(n);
		const solution = solve(system, charge);
		const parameters = system.flows!.map(({ step, direction }) => ({
			kind: 'rate' as const,
			step,
			direction
		}));
		const cells = [
			bestMicroseconds(() => solve(system, charge), budget),
			bestMicroseconds(() => solution.curves(times, out), budget),
			bestMicroseconds(() => solution.at(3.3, one), budget),
			bestMicroseconds(() => sensitivities(system, charge, few, parameters), budget)
		];
		log(
			`${String(n).padStart(7)}   ${cells.map((cell) => cell.toFixed(1).padStart(11)).join(' ')}   ${solution.method}`
		);
	}
}

function growingTree(n: number): LinearSystem {
	const next = random(n);
	const builder = new SystemBuilder(n);
	for (let i = 1; i < n; i++)
		builder.step(Math.floor(next() * i), [[i, 1]], 0.2 + next(), i % 3 === 0 ? 0.2 + next() : 0);
	return builder.build();
}
