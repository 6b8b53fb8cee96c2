/** The material map: what share of the charge goes through each step, in the span that is shown and in the end. */
import { materialMap } from '$lib/kinetics';
import type { SchemeContent } from '$lib/schemas/scheme';
import type { Simulation } from './simulate';

export interface MaterialRow {
	stepId: string;
	number: number;
	words: string;
	/** % of the charge, net of what comes back; null where it cannot be said. */
	shown: number | null;
	final: number | null;
	reversible: boolean;
}

const finite = (value: number): number | null => (Number.isFinite(value) ? value : null);

/** Rows in the order of the steps; empty while there is no solution or nothing is charged. */
export function materialRows(content: SchemeContent, simulation: Simulation): MaterialRow[] {
	const { network, system, solution, conditions, spanS } = simulation;
	if (!system || !solution || !conditions) return [];
	const held = new Set(Object.keys(conditions.excessMolPerL));
	const charge = Float64Array.from(simulation.charge, (c, i) => (held.has(network.species[i].id) ? 0 : c));
	if (!charge.some((c) => c > 0)) return [];
	const until = materialMap(network, system, charge, spanS);
	const inTheEnd = materialMap(network, system, charge);
	return until.map((step, i) => {
		const drawn = content.steps.find((s) => s.id === step.stepId);
		const right = drawn?.products.map((p) => p.species).join(' + ') || 'not assayed';
		return {
			stepId: step.stepId,
			number: content.steps.findIndex((s) => s.id === step.stepId) + 1,
			words: `${drawn?.reactant ?? ''} ${drawn?.reverse ? '⇌' : '→'} ${right}`,
			shown: finite(step.percentOfCharge),
			final: finite(inTheEnd[i].percentOfCharge),
			reversible: drawn?.reverse != null
		};
	});
}
