/**
 * What the checks of a network share: an issue of level `stop`, and the species in excess that a step names.
 *
 * A reverse direction that follows from an equilibrium constant has no law of its own, so it names none.
 *
 * | symbol | name here |
 * | --- | --- |
 * | [X]^m of a step's laws | `excessOf` |
 */
import type { NetworkIssue, RateLaw, Step } from './types';

export function stop(
	code: NetworkIssue['code'],
	message: string,
	where: Partial<NetworkIssue>
): NetworkIssue {
	return { level: 'stop', code, message, ...where };
}

export function excessOf(step: Step): RateLaw['excess'] {
	return step.reverse && step.reverse.form !== 'equilibrium'
		? [...step.forward.excess, ...step.reverse.excess]
		: step.forward.excess;
}
