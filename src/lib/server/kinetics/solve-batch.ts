/**
 * One batch solved from its JSON: units in, engine, units out. Pure, so that it runs in a request or in a worker alike.
 */
import type { Quantity } from '$lib/schemas/quantity';
import type { SolveAnswer, SolvedMode, SolveIssue, SolveRequest } from '$lib/schemas/solve';
import { checkNetwork } from '$lib/kinetics/checks';
import { formulas } from '$lib/kinetics/formulas';
import { toNetwork } from '$lib/kinetics/from-scheme';
import { linearSystem } from '$lib/kinetics/linear-system';
import { rateConstants } from '$lib/kinetics/rate-laws';
import { solve } from '$lib/kinetics/solve';
import type { Conditions, Mode, Network, Solution } from '$lib/kinetics/types';
import { fromSi, toSi, UnitError } from '$lib/kinetics/units';
import { ENGINE_VERSION } from '$lib/kinetics/version';

/** The batch cannot be computed as it stands; every problem names its field. */
export class SolveRefused extends Error {
	constructor(readonly fields: { field: string; message: string }[]) {
		super(fields.map((f) => f.message).join(' '));
		this.name = 'SolveRefused';
	}
}

class Reader {
	readonly problems: { field: string; message: string }[] = [];
	constructor(private readonly request: SolveRequest) {}

	private read(field: string, work: () => number): number {
		try {
			return work();
		} catch (error) {
			if (!(error instanceof UnitError)) throw error;
			this.problems.push({ field, message: `${field}: ${error.message}` });
			return NaN;
		}
	}

	private amounts(name: 'initial' | 'excess'): Record<string, number> {
		const known = new Map(this.request.species.map((s) => [s.id, s]));
		const entries = Object.entries(this.request[name]).map(([species, amount]) => {
			const field = `${name}.${species}`;
			if (!known.has(species)) {
				const message = `${field}: the scheme has no species ${species}; it has ${[...known.keys()].join(', ')}.`;
				this.problems.push({ field, message });
			}
			const molarMassGPerMol = known.get(species)?.molarMassGPerMol;
			const value = this.read(field, () => toSi(amount, 'concentration', { molarMassGPerMol }));
			if (value < 0) this.problems.push({ field, message: `${field}: an amount cannot be below zero.` });
			return [species, value] as const;
		});
		return Object.fromEntries(entries);
	}

	conditions(): { charge: Record<string, number>; conditions: Conditions } {
		const { temperature, referenceTemperature } = this.request;
		const charge = this.amounts('initial');
		const excessMolPerL = this.amounts('excess');
		const temperatureK = this.read('temperature', () =>
			toSi(temperature ?? referenceTemperature, 'temperature')
		);
		if (temperatureK <= 0)
			this.problems.push({ field: 'temperature', message: 'temperature: above 0 K is expected.' });
		return { charge, conditions: { temperatureK, excessMolPerL } };
	}
}

/** The unit of the charge; mol/L where not every species can be told in it. */
function answerUnit(request: SolveRequest): string {
	const charges = Object.values(request.initial);
	const first: Quantity | undefined = charges.find((q) => q.value !== 0) ?? charges[0];
	if (!first) return 'mol/L';
	try {
		for (const { molarMassGPerMol } of request.species)
			fromSi(1, first.unit, 'concentration', { molarMassGPerMol });
		return first.unit;
	} catch (error) {
		if (error instanceof UnitError) return 'mol/L';
		throw error;
	}
}

type Convert = (value: number, species: number) => number;

function solvedMode(mode: Mode, ids: string[], convert: Convert): SolvedMode {
	const simple = mode.amplitudes.length === 1;
	const amplitudes = ids.map((id, i) => {
		const values = mode.amplitudes.map((a) => convert(a[i], i));
		return [id, simple ? values[0] : values] as const;
	});
	return {
		rate: { re: mode.re, im: mode.im, unit: '1/s' },
		multiplicity: mode.multiplicity,
		halfLife: Number.isFinite(mode.halfLifeS) ? mode.halfLifeS : null,
		halfLifeUnit: 's',
		amplitudes: Object.fromEntries(amplitudes)
	};
}

function writtenOut(solution: Solution, request: SolveRequest, ids: string[]): SolveAnswer['closedForm'] {
	const each = formulas(solution, { timeUnit: request.timeUnit, symbols: ids });
	return Object.fromEntries(
		each.map(({ text, latex, note }, i) => [ids[i], { text, latex, unit: 'mol/L' as const, note }])
	);
}

function shape(
	request: SolveRequest,
	network: Network,
	solution: Solution,
	issues: SolveIssue[]
): SolveAnswer {
	const ids = network.species.map((s) => s.id);
	const unit = answerUnit(request);
	const convert: Convert = (value, i) =>
		fromSi(value, unit, 'concentration', { molarMassGPerMol: network.species[i].molarMassGPerMol });
	const factor = toSi({ value: 1, unit: request.timeUnit }, 'time');
	const curves = solution.curves(request.times.map((t) => t * factor));
	const curve = (i: number) => request.times.map((_, k) => convert(curves[k * ids.length + i], i));
	return {
		times: request.times,
		timeUnit: request.timeUnit,
		unit,
		concentrations: Object.fromEntries(ids.map((id, i) => [id, curve(i)])),
		final: Object.fromEntries(ids.map((id, i) => [id, convert(solution.final[i], i)])),
		modes: solution.modes.map((mode) => solvedMode(mode, ids, convert)),
		closedForm: writtenOut(solution, request, ids),
		method: solution.method,
		errorEstimate: solution.errorEstimate,
		issues,
		engineVersion: ENGINE_VERSION
	};
}

/** @throws SolveRefused when a unit, an amount or the scheme stands in the way. */
export function solveBatch(request: SolveRequest): SolveAnswer {
	const reader = new Reader(request);
	const { charge, conditions } = reader.conditions();
	const { network, issues: reading } = toNetwork(request);
	const usable = reader.problems.length === 0;
	const issues: SolveIssue[] = [
		...reading,
		...checkNetwork(network, usable ? charge : undefined, usable ? conditions : undefined)
	];
	const stops = issues.filter((issue) => issue.level === 'stop');
	const fields = stops.map(({ stepId, speciesId, message }) => ({
		field: stepId ? `steps.${stepId}` : speciesId ? `species.${speciesId}` : 'scheme',
		message
	}));
	if (!usable || stops.length) throw new SolveRefused([...reader.problems, ...fields]);
	const system = linearSystem(network, rateConstants(network, conditions));
	const solution = solve(
		system,
		network.species.map((s) => charge[s.id] ?? 0)
	);
	return shape(request, network, solution, issues);
}
