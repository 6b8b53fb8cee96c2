import type { HeatData, RecipeContent } from '$lib/schemas/recipe';
import type { CautionFacts, RateForCaution } from './caution-types';
import type { CautionDraft } from './cautions';
import { plain } from './rounding';
import { accumulation, adiabaticRise, arrheniusFactor, temperatureOrderClass } from './thermal';

const NAMES: [keyof HeatData, string][] = [
	['reactionEnthalpyKJPerMol', 'heat of reaction'],
	['limitingMolPerKg', 'amount of the limiting material per kilogram of mixture'],
	['heatCapacityKJPerKgK', 'heat capacity of the mixture'],
	['mttC', 'maximum technical temperature (MTT)'],
	['td24C', 'TD24 from a stability study'],
	['gasMolPerMol', 'gas evolved']
];

function notAssessed(heat: HeatData): CautionDraft[] {
	const missing = NAMES.filter(([key]) => heat[key] === null).map(([, name]) => name);
	if (missing.length === 0) return [];
	return [
		{
			topic: 'heat',
			code: 'heat-not-assessed',
			kind: 'not assessed',
			title:
				missing.length === NAMES.length
					? 'Heat and gas: not assessed.'
					: 'Heat and gas: partly not assessed.',
			found: `Not entered: ${missing.join(', ')}.`,
			why: 'Without measured data nothing can be said about the heat, the pressure or the decomposition of this batch at scale.',
			unknown: `${missing[0].charAt(0).toUpperCase()}${missing[0].slice(1)}${missing.length > 1 ? ' and the rest of the list' : ''}. A missing figure is not a small one.`,
			inputs: { missing }
		}
	];
}

interface Adverse {
	xacc: number;
	kPerH: number;
	atC: number | null;
	basis: string;
}

const holdTemperature = (
	content: RecipeContent
): { value: number; coldest: number; hottest: number } | null => {
	const point = content.setPoints.find((s) => s.kind === 'temperature' && s.unit.replace(/\s/g, '') === '°C');
	if (!point) return null;
	const ends = [point.value, ...(point.par ?? []), ...(point.nor ?? [])].filter((v) => v !== null);
	return { value: point.value, coldest: Math.min(...ends), hottest: Math.max(...ends) };
};

/** Most accumulation within the recipe's own ranges: lower 95 % limit of k, at the coldest permitted temperature. */
function adverse(rate: RateForCaution, doseTimeH: number, content: RecipeContent): Adverse {
	const k = rate.lowerPerH ?? rate.perH;
	const basis = rate.lowerPerH === null ? 'At the estimate' : 'At the lower 95 % limit';
	const hold = holdTemperature(content);
	if (!hold || rate.energyJPerMol === null) {
		return { kPerH: k, xacc: accumulation(k, doseTimeH), atC: null, basis };
	}
	const kPerH = k * arrheniusFactor(rate.energyJPerMol, hold.coldest, rate.referenceC);
	return { kPerH, xacc: accumulation(kPerH, doseTimeH), atC: hold.coldest, basis };
}

/** Temperatures at which the MTSR is looked for, from the coldest to the hottest permitted. */
const MTSR_POINTS = 200;

/**
 * Highest MTSR within the recipe's own ranges. A colder batch accumulates more, a hotter one starts higher: which of them
 * counts for more depends on the rise, so that the whole range is gone through.
 */
function mtsrOf(
	facts: CautionFacts,
	rate: RateForCaution,
	doseTimeH: number
): { mtsr: number; atC: number } | null {
	const { heat } = facts.content;
	const hold = holdTemperature(facts.content);
	if (
		!hold ||
		heat.reactionEnthalpyKJPerMol === null ||
		heat.limitingMolPerKg === null ||
		heat.heatCapacityKJPerKgK === null
	)
		return null;
	const rise = adiabaticRise(heat.reactionEnthalpyKJPerMol, heat.limitingMolPerKg, heat.heatCapacityKJPerKgK);
	const k = rate.lowerPerH ?? rate.perH;
	let highest = { mtsr: -Infinity, atC: hold.coldest };
	for (let i = 0; i <= MTSR_POINTS; i++) {
		const atC = hold.coldest + ((hold.hottest - hold.coldest) * i) / MTSR_POINTS;
		const factor =
			rate.energyJPerMol === null ? 1 : arrheniusFactor(rate.energyJPerMol, atC, rate.referenceC);
		const mtsr = atC + accumulation(k * factor, doseTimeH) * rise;
		if (mtsr > highest.mtsr) highest = { mtsr, atC };
	}
	return highest;
}

function orderSentence(heat: HeatData, mtsr: number): string {
	if (heat.mttC === null || heat.td24C === null) {
		const missing = [heat.mttC === null ? 'MTT' : null, heat.td24C === null ? 'TD24' : null].filter(Boolean);
		return `${missing.join(' and ')} ${missing.length > 1 ? 'were' : 'was'} not entered and the order of temperatures is not assessed.`;
	}
	const found = temperatureOrderClass(mtsr, heat.mttC, heat.td24C);
	if (found === null) return 'The order of the temperatures entered fits no class of the published scheme.';
	return `The order of the temperatures entered corresponds to class ${found} of the published scheme; classification is made by process safety.`;
}

function doseNotAssessed({ content: { heat } }: CautionFacts): CautionDraft {
	return {
		topic: 'heat',
		code: 'accumulation-not-assessed',
		kind: 'not assessed',
		title: 'Accumulation while dosing: not assessed.',
		found: `A dosing time of ${plain(heat.doseTimeH!)} h was entered, but ${
			heat.doseParameter === null
				? 'no rate constant was named for the dosed reagent'
				: `${heat.doseParameter} is no first-order constant of this fit`
		}.`,
		why: 'What has accumulated reacts on by itself when cooling fails. A colder batch accumulates more.',
		unknown:
			'How much of the dosed reagent is unreacted at the end of the dose. A missing figure is not a small one.',
		inputs: { doseTimeH: heat.doseTimeH, doseParameter: heat.doseParameter }
	};
}

/** Where in the permitted range the highest MTSR lies, unless that is where the accumulation was stated. */
const elsewhere = (atC: number, statedC: number | null): string =>
	statedC === null || Math.abs(atC - statedC) < 0.05 ? '' : ` (highest from ${plain(atC)} °C)`;

function doseCautions(facts: CautionFacts): CautionDraft[] {
	const { heat } = facts.content;
	const rate = facts.rates.find((r) => r.id === heat.doseParameter);
	if (heat.doseTimeH === null) return [];
	if (!rate) return [doseNotAssessed(facts)];
	const worst = adverse(rate, heat.doseTimeH, facts.content);
	const thermal = mtsrOf(facts, rate, heat.doseTimeH);
	const share = worst.xacc * 100;
	const nearLimit =
		thermal !== null &&
		((heat.mttC !== null && thermal.mtsr >= heat.mttC) ||
			(heat.td24C !== null && thermal.mtsr >= heat.td24C - facts.thresholds.td24MarginK));
	if (share <= facts.thresholds.accumulationPercent && !nearLimit) return [];
	const at = worst.atC === null ? '' : ` and ${plain(worst.atC)} °C`;
	const mtsr = thermal
		? `; the calculated MTSR is ${Math.round(thermal.mtsr)} °C${elsewhere(thermal.atC, worst.atC)}`
		: '; the MTSR is not assessed';
	return [
		{
			topic: 'heat',
			code: 'heat-accumulation',
			kind: 'caution',
			title: 'Possible heat accumulation.',
			found:
				`${worst.basis} of the rate constant (${plain(worst.kPerH)} 1/h)${at} about ${Math.round(share)} % of the dosed reagent is unreacted at the end of the ${plain(heat.doseTimeH)} h dose${mtsr}. Calculated from data you entered; not a safety assessment. ${thermal ? orderSentence(heat, thermal.mtsr) : ''}`.trim(),
			why: 'What has accumulated reacts on by itself when cooling fails. A colder batch accumulates more.',
			unknown:
				'The heat of decomposition, the cooling of the vessel in a failure, and whether the step stays pseudo-first-order while it is dosed.',
			inputs: { rate, heat, share: Math.round(share * 10) }
		}
	];
}

function riseCaution(facts: CautionFacts): CautionDraft[] {
	const { heat } = facts.content;
	if (
		heat.reactionEnthalpyKJPerMol === null ||
		heat.limitingMolPerKg === null ||
		heat.heatCapacityKJPerKgK === null
	)
		return [];
	const rise = adiabaticRise(heat.reactionEnthalpyKJPerMol, heat.limitingMolPerKg, heat.heatCapacityKJPerKgK);
	if (rise <= 0) return [];
	return [
		{
			topic: 'heat',
			code: 'adiabatic-rise',
			kind: 'caution',
			title: 'The reaction gives off heat.',
			found: `The adiabatic temperature rise of a whole batch is ${plain(rise)} K, from a heat of reaction of ${plain(heat.reactionEnthalpyKJPerMol)} kJ/mol${heat.source ? ` (${heat.source})` : ''}. Calculated from data you entered; not a safety assessment.`,
			why: 'Without cooling the batch can reach its own temperature plus this rise.',
			unknown: 'Heat losses, side reactions and decompositions that the entered data do not hold.',
			inputs: {
				h: heat.reactionEnthalpyKJPerMol,
				c: heat.limitingMolPerKg,
				cp: heat.heatCapacityKJPerKgK,
				source: heat.source
			}
		}
	];
}

function gasCaution(heat: HeatData): CautionDraft[] {
	if (heat.gasMolPerMol === null || heat.gasMolPerMol === 0) return [];
	return [
		{
			topic: 'gas',
			code: 'gas-evolution',
			kind: 'caution',
			title: 'Gas is evolved.',
			found: `${plain(heat.gasMolPerMol)} mol of gas per mole of the limiting material were entered${heat.ventCapacityM3PerH === null ? '; a vent capacity was not entered and is not assessed' : ` beside a vent capacity of ${plain(heat.ventCapacityM3PerH)} m³/h`}.`,
			why: 'Gas raises the pressure and carries vapour out of the vessel.',
			unknown: 'The rate at which the gas leaves the mixture, and the relief of the vessel used.',
			inputs: { gas: heat.gasMolPerMol, vent: heat.ventCapacityM3PerH }
		}
	];
}

/** Cautions on heat and gas: only from data that a person entered, and "not assessed" for what is missing. */
export function heatCautions(facts: CautionFacts): CautionDraft[] {
	const { heat } = facts.content;
	return [...doseCautions(facts), ...riseCaution(facts), ...gasCaution(heat), ...notAssessed(heat)];
}
