/**
 * Assay channels: what each column of a run sees.
 *
 *     prediction = f · Σ w_i c_i                      in the channel's unit
 *     area %     = 100 · f_j S_j / Σ_j f_j S_j        over the area-% channels of the run and the species without one
 *
 * Units of concentration are converted (g/L through the molar mass of each species); a percentage or fraction of a charge
 * stated in mol/L refers to the whole charge of the run; any other unit ("area", "a.u.") is a scale of its own, whose size the
 * response factor carries.
 */
import type { FitFinding, FitRequest } from '../../schemas/fit';
import { isFitted } from '../../schemas/quantity';
import type { Network } from '../types';
import { fromSi, isUnitOf, toSi, UnitError } from '../units';
import { linearOf, type Linear } from './affine';
import { localId } from './local-slots';
import { isRelativeUnit, runId, type Slot } from './slots';

export interface ChannelModel {
	id: string;
	unit: string;
	/** Species seen, and weight of each with the unit's factor in it. */
	species: Int32Array;
	weights: Float64Array;
	/** ln f; constant 0 where there is no response factor. */
	lnResponse: Linear;
	/** Channels whose areas are stated as a share of the total. */
	areaPercent: boolean;
	loq: number | null;
	/** Free parameters fitted as a response factor of this channel. */
	scaleFitted: boolean;
	/** Shown beside the detector's own channels: a share of their total, without adding to it. */
	besideTotal?: boolean;
}

const AREA_PERCENT = /^(area|lcap)\s*-?\s*%?$/i;
export const isAreaPercent = (unit: string): boolean =>
	/%|lcap/i.test(unit) && AREA_PERCENT.test(unit.trim());

export function readChannels(
	request: FitRequest,
	network: Network,
	slots: Map<string, Slot>,
	free: Slot[],
	index: number,
	issues: FitFinding[]
): ChannelModel[] {
	const run = request.runs[index];
	const shareOf = chargeForShares(run, request.species);
	const seen = new Set<string>();
	return run.channels.map((channel) => {
		if (seen.has(channel.id))
			throw new RangeError(`two channels carry the id ${channel.id}; give each its own.`);
		seen.add(channel.id);
		const entries = Object.entries(channel.weights).filter(([, w]) => w !== 0);
		if (entries.length === 0)
			throw new RangeError(`channel ${channel.id} sees no species. Name at least one with its weight.`);
		const areaPercent = isAreaPercent(channel.unit);
		const factors = entries.map(([species]) =>
			areaPercent
				? 1
				: unitFactor(channel.unit, network.species.find((s) => s.id === species)?.molarMassGPerMol, shareOf)
		);
		noteShares(channel.unit, run, index, shareOf, issues);
		const lnResponse = responseOf(channel, runId(run, index), slots, free);
		return {
			id: channel.id,
			unit: channel.unit,
			species: Int32Array.from(entries, ([s]) => network.species.findIndex((x) => x.id === s)),
			weights: Float64Array.from(entries, ([, w], i) => w * factors[i]),
			lnResponse,
			areaPercent,
			loq: channel.loq ?? null,
			scaleFitted: lnResponse.terms.length > 0
		};
	});
}

function responseOf(
	channel: FitRequest['runs'][number]['channels'][number],
	run: string,
	slots: Map<string, Slot>,
	free: Slot[]
): Linear {
	const given = channel.responseFactor;
	if (!given) return { constant: 0, terms: [] };
	const shared = `${channel.id}.responseFactor`;
	const own = localId(run, shared);
	const id = slots.has(own) ? own : shared;
	if (!isFitted(given) && slots.get(id)?.state !== 'tied') {
		if (!(given.value > 0))
			throw new RangeError(
				`the response factor of channel ${channel.id} must be above zero; found ${given.value}.`
			);
		return { constant: Math.log(given.value), terms: [] };
	}
	return linearOf(slots, free, id);
}

/**
 * The whole charge in mol/L, species in excess left out, where a percentage can refer to it; null where the charge is relative
 * itself. A charge that is fitted counts with the value stated for it: that is what the lab divided by.
 */
function chargeForShares(run: FitRequest['runs'][number], species: FitRequest['species']): number | null {
	let total = 0;
	for (const [id, amount] of Object.entries(run.initial)) {
		const of = species.find((s) => s.id === id);
		const stated = isFitted(amount) ? amount.guess : amount;
		if (!stated) return null;
		if (stated.value === 0 || of?.role === 'reagent in excess') continue;
		if (!/mol|M$|g\/|mg\//.test(stated.unit) || /mol\s*%|mol\/mol/.test(stated.unit)) return null;
		const context = of?.molarMassGPerMol === undefined ? {} : { molarMassGPerMol: of.molarMassGPerMol };
		if (!isUnitOf(stated.unit, 'concentration', context)) return null;
		total += toSi(stated, 'concentration', context);
	}
	return total > 0 ? total : null;
}

const isShare = (unit: string) =>
	/^(%|fraction|mol\s*%|mol\/mol|% of charge|fraction of charge)$/i.test(unit.trim());

function unitFactor(unit: string, molarMassGPerMol: number | undefined, charge: number | null): number {
	if (isShare(unit) && charge !== null) return (unit.includes('%') ? 100 : 1) / charge;
	if (/^(fraction|% of charge)/i.test(unit.trim())) return unit.includes('%') ? 100 : 1;
	const context = molarMassGPerMol === undefined ? {} : { molarMassGPerMol };
	try {
		return fromSi(1, unit, 'concentration', context);
	} catch (error) {
		if (error instanceof UnitError && (isRelativeUnit(unit) || !/mol|g\//.test(unit))) return 1;
		throw error;
	}
}

function noteShares(
	unit: string,
	run: FitRequest['runs'][number],
	index: number,
	charge: number | null,
	issues: FitFinding[]
): void {
	if (!isShare(unit) || charge === null || issues.some((i) => i.code === 'share-of-charge')) return;
	issues.push({
		code: 'share-of-charge',
		level: 'note',
		message: `Values in ${unit} are read as shares of the whole charge of run ${runId(run, index)} (${charge} mol/L).`,
		runs: [runId(run, index)]
	});
}
