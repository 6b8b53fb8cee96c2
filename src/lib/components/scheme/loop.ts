/**
 * Closing a loop of reversible steps: the reverse constant of one step is set so that the product of the forward constants
 * round the loop equals that of the reverse ones (Wegscheider's condition).
 */
import type { NetworkIssue } from '$lib/kinetics';
import { isEquilibrium, type SchemeContent, type StepContent } from '$lib/schemas/scheme';

const digits = (value: number): number => Number(value.toPrecision(12));

/** Whether this finding is a loop that one constant can close. */
export const closesByOneConstant = (
	issue: NetworkIssue
): issue is NetworkIssue & { stepId: string; ratio: number } =>
	issue.code === 'detailed-balance-broken' && issue.ratio !== undefined && issue.stepId !== undefined;

function scaled(reverse: StepContent['reverse'], ratio: number): StepContent['reverse'] {
	if (!reverse) return reverse;
	if (isEquilibrium(reverse)) {
		const { value, unit } = reverse.equilibriumConstant;
		return { ...reverse, equilibriumConstant: { value: digits(value / ratio), unit } };
	}
	return { ...reverse, kRef: { ...reverse.kRef, value: digits(reverse.kRef.value * ratio) } };
}

/** The scheme with the loop of this finding closed by the reverse constant of the step that it names. */
export function closeLoop(content: SchemeContent, issue: { stepId: string; ratio: number }): SchemeContent {
	return {
		...content,
		steps: content.steps.map((step) =>
			step.id === issue.stepId ? { ...step, reverse: scaled(step.reverse, issue.ratio) } : step
		)
	};
}
