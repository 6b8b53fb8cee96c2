/**
 * From the request (units on every number) to the question in SI, with refusals in plain words.
 */
import type { FirstFormResult } from '../../schemas/window';
import { CriterionError, toCriterion } from '../criteria';
import { rateConstants } from '../rate-laws';
import type { Network } from '../types';
import { toSi, UnitError, type Dimension, type UnitContext, type UnitQuantity } from '../units';
import type { Question } from './answers';
import { WindowRefusal, type FirstFormInput } from './types';

/** How far outside the studied range still counts as inside: the reading of a thermometer, K. */
const TEMPERATURE_SLACK = 0.05;

export interface ReadQuestion {
	question: Question;
	temperatureC: number;
	outsideStudied: boolean;
	/** mol/L over all species charged. */
	totalCharge: number;
	notes: FirstFormResult['notes'];
}

/** @throws WindowRefusal */
export function readQuestion({ request, fit }: FirstFormInput, network: Network): ReadQuestion {
	const notes: FirstFormResult['notes'] = [];
	const temperatureK = read(request.temperature, 'temperature', 'temperature');
	const temperatureC = temperatureK - 273.15;
	const outsideStudied = checkTemperature(
		temperatureC,
		fit.studied?.temperatureC,
		request.allowOutsideStudied
	);
	const charge = readAmounts(request.charge, network, 'charge');
	const totalCharge = network.species.reduce(
		(sum, species, i) => (species.role === 'reagent in excess' ? sum : sum + charge[i]),
		0
	);
	if (!(totalCharge > 0))
		throw new WindowRefusal(
			'missing charge',
			'Nothing is charged. Give the concentration of the starting material.',
			'charge'
		);
	chargeNotes(charge, network, fit.studied?.chargeMolPerL ?? {}, notes);
	areaNote(request, notes);
	const excess = readAmounts(request.excess, network, 'excess');
	const excessMolPerL = Object.fromEntries(
		network.species.flatMap((species, i) => (species.id in request.excess ? [[species.id, excess[i]]] : []))
	);
	const conditions = { temperatureK, excessMolPerL };
	try {
		rateConstants(network, conditions);
	} catch (error) {
		if (!(error instanceof RangeError)) throw error;
		throw new WindowRefusal('missing excess', error.message, 'excess');
	}
	const horizonS = request.horizon ? read(request.horizon, 'time', 'horizon') : Infinity;
	if (!(horizonS > 0))
		throw new WindowRefusal('missing unit', 'The latest time must be above zero.', 'horizon');
	return {
		question: {
			conditions,
			charge,
			horizonS,
			maximaOf: maximaOf(request.maximaOf, network),
			criteria: readCriteria(request, network, charge)
		},
		temperatureC,
		outsideStudied,
		totalCharge,
		notes
	};
}

function read(q: UnitQuantity, dimension: Dimension, field: string, context: UnitContext = {}): number {
	try {
		return toSi(q, dimension, context);
	} catch (error) {
		if (!(error instanceof UnitError)) throw error;
		throw new WindowRefusal('missing unit', error.message, field);
	}
}

function checkTemperature(celsius: number, studied: [number, number] | undefined, allowed: boolean): boolean {
	if (!studied) return false;
	const [low, high] = studied;
	const outside = celsius < low - TEMPERATURE_SLACK || celsius > high + TEMPERATURE_SLACK;
	if (outside && !allowed) {
		const range = low === high ? `${degrees(low)} °C alone` : `${degrees(low)} to ${degrees(high)} °C`;
		throw new WindowRefusal(
			'outside studied range',
			`${degrees(celsius)} °C lies outside the studied range: the runs of this fit cover ${range}. Choose a temperature inside, add a run, or ask for an answer that is marked as outside.`,
			'temperature'
		);
	}
	return outside;
}

const degrees = (value: number): string => String(Number(value.toFixed(2)));

function readAmounts(
	amounts: Record<string, UnitQuantity>,
	network: Network,
	field: 'charge' | 'excess'
): Float64Array {
	const values = new Float64Array(network.species.length);
	for (const [id, amount] of Object.entries(amounts)) {
		const i = network.species.findIndex((species) => species.id === id);
		if (i < 0)
			throw new WindowRefusal(
				'unknown species',
				`The ${field} names ${id}, which the scheme does not have. It has ${network.species.map((s) => s.id).join(', ')}.`,
				`${field}.${id}`
			);
		const { molarMassGPerMol } = network.species[i];
		const context = molarMassGPerMol === undefined ? {} : { molarMassGPerMol };
		values[i] = read(amount, 'concentration', `${field}.${id}`, context);
		if (!(values[i] >= 0))
			throw new WindowRefusal(
				'missing charge',
				`The ${field} of ${id} is negative. A concentration of zero or more is expected.`,
				`${field}.${id}`
			);
	}
	return values;
}

function chargeNotes(
	charge: Float64Array,
	network: Network,
	studied: Record<string, [number, number]>,
	notes: FirstFormResult['notes']
): void {
	network.species.forEach(({ id }, i) => {
		const range = studied[id];
		if (charge[i] === 0 && !range) return;
		const [low, high] = range ?? [0, 0];
		if (charge[i] >= low * 0.99 && charge[i] <= high * 1.01) return;
		const covered =
			low === high
				? `${Number(low.toPrecision(4))}`
				: `${Number(low.toPrecision(4))} to ${Number(high.toPrecision(4))}`;
		notes.push({
			level: 'caution',
			code: 'charge-outside-studied',
			message: `The charge of ${id}, ${Number(charge[i].toPrecision(4))} mol/L, lies outside what the runs cover (${covered} mol/L). First-order constants may change with concentration.`
		});
	});
}

/** A limit in area % depends on the detector: what it was counted with is said wherever it is used. */
function areaNote(
	{ criteria, responseFactors }: FirstFormInput['request'],
	notes: FirstFormResult['notes']
): void {
	if (!criteria.some((criterion) => criterion.unit === 'area %')) return;
	const stated = Object.entries(responseFactors)
		.filter(([, factor]) => factor !== 1)
		.map(([species, factor]) => `${species} ${Number(factor.toPrecision(4))}`);
	const counted = stated.length
		? `the relative response factors ${stated.join(', ')}, and 1 for every other species`
		: 'relative response factor 1 for every species';
	notes.push({
		level: 'caution',
		code: 'area-percent-factors',
		message: `The limit in area % is counted with ${counted}. Where the detector sees species differently, give the limit in % of charge.`
	});
}

function maximaOf(asked: string[] | undefined, network: Network): number[] {
	if (!asked)
		return network.species.flatMap((species, i) => (species.role === 'reagent in excess' ? [] : [i]));
	return asked.map((id) => {
		const i = network.species.findIndex((species) => species.id === id);
		if (i >= 0) return i;
		throw new WindowRefusal('unknown species', `The scheme has no species ${id}.`, 'maximaOf');
	});
}

function readCriteria(request: FirstFormInput['request'], network: Network, charge: Float64Array) {
	return request.criteria.map((content, j) => {
		try {
			return toCriterion(content, { network, charge, responseFactors: request.responseFactors });
		} catch (error) {
			if (!(error instanceof CriterionError)) throw error;
			throw new WindowRefusal(error.code, error.message, `criteria.${j}`);
		}
	});
}
