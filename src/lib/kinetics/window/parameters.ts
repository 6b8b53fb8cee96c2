/**
 * A network at the estimates of a fit, and at any other values of its parameters.
 *
 * Problem: a report gives values in the units that people chose, with a covariance on the scale of estimation (ln for
 * constants, J/mol for energies). Here every parameter that changes the curve becomes a place in the network, in SI, that can
 * be set quickly for each draw; tied parameters follow their leader in a fixed ratio.
 */
import { isEquilibrium, type SchemeContent, type StepContent } from '../../schemas/scheme';
import { hasLocalConstants } from '../fit/local-slots';
import { toNetwork } from '../from-scheme';
import type { Network, RateLaw, Step } from '../types';
import { toSi, UnitError, type Dimension } from '../units';
import { WindowRefusal, type FirstFormInput, type FitBasis } from './types';

/** A parameter of the network with its value at the estimates, SI. */
export interface NetworkParameter {
	id: string;
	scale: 'ln' | 'linear';
	estimate: number;
	/** Place in the report's covariance; −1 where it was not fitted. */
	fitted: number;
	/** Standard error on the scale of estimation; 0 where not fitted, Infinity where the data do not determine it. */
	error: number;
	set: (network: Network, value: number) => void;
}

export interface FittedNetwork {
	/** At the estimates. */
	network: Network;
	/** Those that were fitted and change the curve. */
	varied: NetworkParameter[];
	/** Ids of fitted parameters that the data do not determine. */
	undetermined: string[];
	/** Ids at a bound: they stay where they are. */
	atBound: string[];
	/** Ids of tied parameters whose leader is not known. */
	untied: string[];
	/** Sets all varied parameters (and what is tied to them) in a network of the same scheme. */
	apply: (network: Network, values: ArrayLike<number>) => void;
}

/** @throws WindowRefusal when scheme and report do not belong together. */
export function fittedNetwork({ scheme, fit, tied = [] }: FirstFormInput): FittedNetwork {
	const { network, issues } = toNetwork(scheme);
	const stop = issues.find((issue) => issue.level === 'stop');
	if (stop) throw new WindowRefusal('scheme not usable', stop.message);
	if (hasLocalConstants(fit))
		throw new WindowRefusal(
			'fit not usable',
			'This fit has rate constants of its own in each run, so it does not say how they change with temperature. Compute the window from a fit whose constants are shared by all runs.'
		);
	const all = new Map<string, NetworkParameter>();
	for (const reported of fit.parameters) {
		const parameter = readParameter(reported, scheme, fit);
		if (!parameter) continue;
		parameter.set(network, parameter.estimate);
		all.set(parameter.id, parameter);
	}
	const states = new Map(fit.parameters.map((p) => [p.id, p.state]));
	const fitted = [...all.values()].filter((p) => p.fitted >= 0 && states.get(p.id) === 'fitted');
	const followers = tied.flatMap(({ parameter, to, factor }) => {
		const follower = all.get(parameter);
		const leader = all.get(to);
		if (!follower || !leader) return [];
		const ratio = leader.estimate === 0 ? factor : follower.estimate / leader.estimate;
		return [{ follower, leader, ratio }];
	});
	const varied = fitted.filter((p) => Number.isFinite(p.error) && p.error > 0);
	const led = new Set(followers.map(({ follower }) => follower.id));
	return {
		network,
		varied,
		undetermined: fitted.filter((p) => !Number.isFinite(p.error)).map((p) => p.id),
		atBound: [...all.keys()].filter((id) => states.get(id) === 'at bound'),
		untied: [...all.keys()].filter((id) => states.get(id) === 'tied' && !led.has(id)),
		apply(target, values) {
			varied.forEach((parameter, j) => {
				parameter.set(target, values[j]);
				for (const { follower, leader, ratio } of followers)
					if (leader === parameter) follower.set(target, ratio * values[j]);
			});
		}
	};
}

/** A copy whose constants may be changed without touching the original. */
export function copyNetwork(network: Network): Network {
	const law = <T extends object>(value: T): T => ({ ...value });
	return {
		...network,
		steps: network.steps.map((step) => ({
			...step,
			forward: law(step.forward),
			reverse: step.reverse && law(step.reverse)
		}))
	};
}

function readParameter(
	reported: FitBasis['parameters'][number],
	scheme: SchemeContent,
	fit: FitBasis
): NetworkParameter | null {
	const [stepId, direction, name, ...rest] = reported.id.split('.');
	if (rest.length > 0 || (direction !== 'forward' && direction !== 'reverse')) return null;
	const content = scheme.steps.find((step) => step.id === stepId);
	if (!content)
		throw new WindowRefusal(
			'fit not usable',
			`The fit has the parameter ${reported.id}, but the scheme has no step ${stepId}. Use the scheme version that was fitted.`
		);
	const place = placeOf(stepId, direction, name);
	if (!place) return null;
	const fitted = fit.fittedIds.indexOf(reported.id);
	const variance = fitted >= 0 ? (fit.covariance[fitted]?.[fitted] ?? NaN) : 0;
	return {
		id: reported.id,
		scale: fitted >= 0 ? fit.scales[fitted] : place.scale,
		estimate: siValue(reported, place.dimension, content, direction),
		fitted,
		error: Number.isFinite(variance) ? Math.sqrt(Math.max(0, variance)) : Infinity,
		set: place.set
	};
}

interface Place {
	dimension: Dimension;
	scale: 'ln' | 'linear';
	set: (network: Network, value: number) => void;
}

function placeOf(stepId: string, direction: 'forward' | 'reverse', name: string): Place | null {
	const change = (apply: (step: Step, value: number) => void) => (network: Network, value: number) => {
		const step = network.steps.find((s) => s.id === stepId);
		if (step) apply(step, value);
	};
	const law = (step: Step): RateLaw | null => {
		if (direction === 'forward') return step.forward;
		return step.reverse && step.reverse.form !== 'equilibrium' ? step.reverse : null;
	};
	switch (name) {
		case 'kRef':
			return {
				dimension: 'rate constant',
				scale: 'ln',
				set: change((step, value) => {
					const found = law(step);
					if (found) found.kRefPerS = value;
				})
			};
		case 'activationEnergy':
			return {
				dimension: 'molar energy',
				scale: 'linear',
				set: change((step, value) => {
					const found = law(step);
					if (found) found.energyJPerMol = value;
				})
			};
		case 'equilibriumConstant':
			return {
				dimension: 'equilibrium constant',
				scale: 'ln',
				set: change((step, value) => {
					if (step.reverse?.form === 'equilibrium') step.reverse.kEqRef = value;
				})
			};
		case 'enthalpy':
			return {
				dimension: 'molar energy',
				scale: 'linear',
				set: change((step, value) => {
					if (step.reverse?.form === 'equilibrium') step.reverse.enthalpyJPerMol = value;
				})
			};
		default:
			return null;
	}
}

function siValue(
	{ id, estimate, unit }: FitBasis['parameters'][number],
	dimension: Dimension,
	step: StepContent,
	direction: 'forward' | 'reverse'
): number {
	const law =
		direction === 'forward'
			? step.forward
			: step.reverse && !isEquilibrium(step.reverse)
				? step.reverse
				: null;
	const excessOrder = (law?.excess ?? []).reduce((sum, entry) => sum + entry.order, 0);
	try {
		return toSi({ value: estimate, unit }, dimension, { excessOrder });
	} catch (error) {
		if (!(error instanceof UnitError)) throw error;
		throw new WindowRefusal('fit not usable', `Parameter ${id}: ${error.message}`);
	}
}
