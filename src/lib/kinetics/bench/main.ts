/**
 * The engine's figures: accuracy against extended precision, speed beside NumPy and SciPy in the same run, growth of cost with
 * the number of species. Printed line by line through `log`; nothing here fails.
 */
import { familyAccuracy, type FamilyAccuracy } from './accuracy';
import { FAMILIES } from './families';
import { growthLines, speedLines } from './speed';

export interface BenchOptions {
	/** A short run: fewer networks, shorter timings. */
	quick: boolean;
	/** Runs a Python program and gives what it prints; null where python3 with SciPy is not on the machine. */
	python?: (program: string) => Promise<string | null>;
}

export type Log = (line: string) => void;

/** More than 10 000 networks in all. */
const NETWORKS_PER_FAMILY = 715;
const NETWORKS_QUICK = 20;

export async function runBench(log: Log, options: BenchOptions): Promise<void> {
	accuracyLines(log, options.quick ? NETWORKS_QUICK : NETWORKS_PER_FAMILY);
	log('');
	await speedLines(log, options);
	log('');
	growthLines(log, options.quick);
	await fitLines(log, options);
}

function accuracyLines(log: Log, count: number): void {
	log(
		`Accuracy: ${FAMILIES.length * count} random networks of 2 to 12 species against 120-digit arithmetic, seeds from 1`
	);
	log(
		'family                        worst / charge  seed   worst relative  seed   error/estimate  negative  ways taken'
	);
	let worst = 0;
	let networks = 0;
	for (const family of FAMILIES) {
		const found = familyAccuracy(family, 1, count);
		worst = Math.max(worst, found.worst);
		networks += found.networks;
		log(accuracyLine(found));
	}
	log(`All ${networks}: worst ${worst.toExponential(1)} of the charge (asked for: 1e-12).`);
}

function accuracyLine(f: FamilyAccuracy): string {
	const methods = Object.entries(f.methods)
		.map(([method, count]) => `${method} ${count}`)
		.join(', ');
	return [
		f.family.padEnd(29),
		f.worst.toExponential(1).padEnd(15),
		String(f.worstSeed).padEnd(6),
		f.worstRelative.toExponential(1).padEnd(15),
		String(f.worstRelativeSeed).padEnd(6),
		f.overEstimate.toFixed(2).padEnd(15),
		(f.broken > 0 ? `${f.broken} broken` : f.lowest === 0 ? 'none' : f.lowest.toExponential(1)).padEnd(9),
		methods
	].join(' ');
}

interface FitBench {
	runFitBench: (log: Log, options: BenchOptions) => Promise<void> | void;
}

async function fitLines(log: Log, options: BenchOptions): Promise<void> {
	for (const load of Object.values(import.meta.glob<FitBench>('./fit.ts'))) {
		log('');
		await (await load()).runFitBench(log, options);
	}
}
