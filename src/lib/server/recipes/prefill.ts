import { inMinutes, roundDown, roundUp } from '$lib/recipe/rounding';
import { isFitted, type Quantity } from '$lib/schemas/quantity';
import {
	heatSchema,
	recipeContent,
	type ChargeLine,
	type Hold,
	type Operation,
	type RecipeContent,
	type Scale,
	type SetPoint
} from '$lib/schemas/recipe';
import type { CriterionContent } from '$lib/schemas/study';
import type { RunContent } from '$lib/schemas/run';
import { isUnitOf, toSi } from '$lib/kinetics/units';
import type { FitFacts } from './fit-facts';
import type { WindowFacts } from './window-facts';

export interface PrefillInput {
	title: string;
	decision: string;
	criteria: CriterionContent[];
	facts: FitFacts;
	window: { number: number; facts: WindowFacts | null; charge: Record<string, Quantity> } | null;
	scale?: Scale;
}

const celsius = (run: RunContent): number => toSi(run.temperature, 'temperature') - 273.15;
const tidy = (value: number): number => Number(value.toPrecision(6));

/** The run whose temperature is nearest to the one wanted: its charge is the set-point charge. */
function nearestRun(runs: RunContent[], temperatureC: number | null): RunContent {
	if (temperatureC === null) return runs[0];
	return [...runs].sort(
		(a, b) => Math.abs(celsius(a) - temperatureC) - Math.abs(celsius(b) - temperatureC)
	)[0];
}

/** Charges that were fixed and above zero, mol/L where the unit allows: the window's, else those of the nearest run. */
function chargesOf(
	run: RunContent,
	ofWindow: Record<string, Quantity>,
	species: FitFacts['fit']['request']['species']
): Map<string, number> {
	const found = new Map<string, number>();
	const given = Object.keys(ofWindow).length > 0 ? ofWindow : run.initial;
	for (const [id, amount] of Object.entries(given)) {
		const stated = isFitted(amount) ? amount.guess : amount;
		// "100 %" says how the assay is counted, not how much was charged.
		if (!stated || stated.value <= 0 || isUnitOf(stated.unit, 'fraction')) continue;
		const molarMassGPerMol = species.find((s) => s.id === id)?.molarMassGPerMol;
		try {
			found.set(
				id,
				tidy(toSi(stated, 'concentration', molarMassGPerMol === undefined ? {} : { molarMassGPerMol }))
			);
		} catch {
			// An area or a mass without molar mass gives no concentration: the person enters the charge.
		}
	}
	return found;
}

const criterionWords = (c: CriterionContent): string => `${c.species} ${c.relation} ${c.limit} ${c.unit}`;

/** No criterion ever ends the hold: it has a beginning alone, and nothing is stated for its end. */
function openHold(number: number, facts: WindowFacts, temperatureC: number): Hold {
	const earliest = facts.fromBoundH ?? facts.fromH;
	return {
		temperatureC,
		unit: 'h',
		nominal: null,
		bound: null,
		stated: null,
		notBefore: earliest === null || earliest <= 0 ? null : roundUp(earliest),
		limits: facts.fromBinds && `${facts.fromBinds} below`,
		basis: `From window ${number}: every criterion holds from then on, and none of them ends the hold.`
	};
}

/** The hold ends at the adverse bound; where the bounds leave no time at all nothing is stated. */
function holdOf(window: PrefillInput['window'], temperatureC: number): Hold | null {
	const facts = window?.facts;
	if (!window || !facts) return null;
	if (facts.toH === null) return openHold(window.number, facts, temperatureC);
	const used = facts.toBoundH ?? facts.toH;
	const earliest = facts.fromBoundH ?? facts.fromH;
	const basis =
		facts.toBoundH === null
			? `From window ${window.number}, from the estimates alone: no bound was computed. Rounded down.`
			: `From window ${window.number}, at the one-sided ${facts.confidencePercent} % bound of the parameters. Rounded down.`;
	const stated = used > 0 ? roundDown(used) : 0;
	const notBefore = earliest === null || earliest <= 0 ? null : roundUp(earliest);
	const none = notBefore !== null && notBefore > stated;
	return {
		temperatureC,
		unit: 'h',
		nominal: facts.toH,
		bound: facts.toBoundH,
		stated: none ? null : stated,
		notBefore: none ? null : notBefore,
		limits: [facts.fromBinds && `${facts.fromBinds} below`, facts.toBinds && `${facts.toBinds} above`]
			.filter(Boolean)
			.join(', '),
		basis: none
			? `From window ${window.number}: at the bounds of the parameters no time meets every criterion.`
			: basis
	};
}

/** The hold's set-point: the earliest time that meets the criteria, or the stated hold where none is set. */
const holdSetPoint = (hold: Hold): number | null => hold.notBefore ?? hold.stated;

function setPointsOf(
	input: PrefillInput,
	temperatureC: number,
	charges: Map<string, number>,
	hold: Hold | null
): SetPoint[] {
	const { studied } = input.facts.fit.report;
	const points: SetPoint[] = [
		{
			id: 'temperature',
			kind: 'temperature',
			parameter: 'Hold temperature',
			unit: '°C',
			value: temperatureC,
			nor: null,
			par: null,
			binds: '',
			studied: [tidy(studied.temperatureC[0]), tidy(studied.temperatureC[1])]
		}
	];
	const time = hold ? holdSetPoint(hold) : null;
	if (hold && time !== null)
		points.push({
			id: 'time',
			kind: 'time',
			parameter: 'Hold time',
			unit: hold.unit,
			value: time,
			nor: null,
			par: hold.stated === null ? [time, null] : time <= hold.stated ? [time, hold.stated] : null,
			binds: hold.limits,
			studied: [0, tidy(studied.lastTimeH)]
		});
	for (const [species, value] of charges)
		points.push({
			id: `charge-${species}`,
			kind: 'charge',
			parameter: `Charge of ${species}`,
			species,
			unit: 'mol/L',
			value,
			nor: null,
			par: null,
			binds: 'studied range',
			studied: studied.chargeMolPerL[species] ?? null
		});
	return points;
}

function chargeLines(input: PrefillInput, run: RunContent, charges: Map<string, number>): ChargeLine[] {
	const { species } = input.facts.fit.request;
	const blank = { densityKgPerL: null, assayPercent: null, solutionMolPerL: null, tolerancePercent: null };
	const named = (id: string) => species.find((s) => s.id === id);
	const [first] = charges.keys();
	const limiting = first === undefined ? null : charges.get(first)!;
	const line = (id: string, measure: ChargeLine['measure'], role: string): ChargeLine => ({
		...blank,
		id: `charge-${id}`,
		material: named(id)?.name || id,
		role: named(id)?.role ?? role,
		species: id,
		measure,
		molarMassGPerMol: named(id)?.molarMassGPerMol ?? null
	});
	const lines = [...charges].map(([id, value], i) =>
		i === 0 || limiting === null
			? line(id, { by: 'limiting' }, 'starting material')
			: line(id, { by: 'equivalents', value: tidy(value / limiting) }, 'starting material')
	);
	for (const [id, amount] of Object.entries(run.excess)) {
		if (limiting === null || charges.has(id)) continue;
		lines.push(
			line(
				id,
				{ by: 'equivalents', value: tidy(toSi(amount, 'concentration') / limiting) },
				'reagent in excess'
			)
		);
	}
	if (limiting !== null)
		lines.push({
			...blank,
			id: 'solvent',
			material: 'Solvent',
			role: 'solvent',
			measure: { by: 'fill to', value: limiting },
			molarMassGPerMol: null
		});
	return lines;
}

function procedureOf(temperatureC: number, hold: Hold | null, criteria: CriterionContent[]): Operation[] {
	const blank = { unitProcedure: 'Reaction', durationMin: null, maxDurationMin: null, phases: [] };
	const until = criteria.map(criterionWords).join(', ');
	const time = hold ? holdSetPoint(hold) : null;
	return [
		{ ...blank, id: 'charge', kind: 'Charge', text: '', fromC: null, toC: null },
		{ ...blank, id: 'heat', kind: 'Heat', text: `to ${temperatureC} °C`, fromC: null, toC: temperatureC },
		{
			...blank,
			id: 'hold',
			kind: 'Hold',
			text: until ? `until ${until}` : '',
			durationMin: hold && time !== null ? tidy(inMinutes(time, hold.unit)) : null,
			maxDurationMin: hold?.stated ? tidy(inMinutes(hold.stated, hold.unit)) : null,
			fromC: temperatureC,
			toC: temperatureC
		},
		{ ...blank, id: 'cool', kind: 'Cool', text: '', fromC: temperatureC, toC: null }
	];
}

function ipcOf(criteria: CriterionContent[], hold: Hold | null): RecipeContent['ipc'] {
	const at = hold ? holdSetPoint(hold) : null;
	return criteria.map((c, i) => ({
		id: `ipc${i + 1}`,
		operation: 'hold',
		atMin: hold && at !== null ? tidy(inMinutes(at, hold.unit)) : null,
		test: `${c.species}`,
		limit: `${c.relation} ${c.limit} ${c.unit}`,
		lagMin: null,
		ifNotMet: ''
	}));
}

/** First draft of a recipe from a fit, its window and the study: what they say, and blanks for the rest. */
export function prefill(input: PrefillInput): RecipeContent {
	const { facts, window } = input;
	const runs = facts.fit.request.runs;
	const wanted = window?.facts?.temperatureC ?? null;
	const run = nearestRun(runs, wanted);
	const temperatureC = tidy(wanted ?? celsius(run));
	const charges = chargesOf(run, window?.charge ?? {}, facts.fit.request.species);
	const hold = holdOf(window, temperatureC);
	const { report } = facts.fit;
	return recipeContent.parse({
		title: input.title,
		target: input.decision,
		criteria: input.criteria,
		basis: {
			fitNumber: facts.fit.number,
			schemeName: facts.schemeName,
			schemeNumber: facts.schemeNumber,
			runs: facts.runs.map((r) => ({ id: r.runId, number: r.number, revision: r.revision, name: r.name })),
			windowNumber: window?.number ?? null,
			inputHash: facts.fit.inputHash,
			engineVersion: facts.fit.engineVersion,
			studiedTemperatureC: report.studied.temperatureC,
			studiedChargeMolPerL: Object.fromEntries(
				Object.entries(report.studied.chargeMolPerL).filter(([id]) => charges.has(id))
			),
			lastTimeH: report.studied.lastTimeH
		},
		setPoints: setPointsOf(input, temperatureC, charges, hold),
		hold,
		scale: input.scale ?? { value: 10, unit: 'L' },
		charges: chargeLines(input, run, charges),
		procedure: procedureOf(temperatureC, hold, input.criteria),
		ipc: ipcOf(input.criteria, hold),
		heat: heatSchema.parse({})
	});
}
