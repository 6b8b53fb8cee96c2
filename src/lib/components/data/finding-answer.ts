/** From a press on an option to the answer that it stands for. */
import type { Answer, Answers, Finding, FindingOption } from '$lib/schemas/sheet';

export const LEVEL_WORDS = { stop: 'Stop', ask: 'Ask', note: 'Note' } as const;

/** "A14", "rows 9, 10" or "E17, E20 and 3 more". */
export function placeWords(finding: Finding, most = 4): string {
	const { cells, count } = finding;
	if (cells.length === 0) return finding.sheet || 'workbook';
	const shown = cells.slice(0, most).join(', ');
	const more = Math.max(count, cells.length) - Math.min(cells.length, most);
	return more > 0 ? `${shown} and ${more} more` : shown;
}

const isFull = (option: FindingOption): boolean =>
	(option.needsValue ?? []).every((field) => field.suggested !== undefined);

/**
 * The words on the button: where everything that the option needs was found on the sheet, the button says it, so that
 * one press takes exactly what it shows.
 */
export function optionWords(option: FindingOption): string {
	const fields = option.needsValue ?? [];
	if (fields.length !== 1 || fields[0].suggested === undefined) return option.label;
	const { suggested, unit } = fields[0];
	const value = `${suggested}${unit ? ` ${unit}` : ''}`;
	const label = option.label.replace(/\s*…\s*$/, '');
	return /\b(is|of)$/.test(label) ? `${label} ${value}` : `${label}: ${value}`;
}

/** The answer that a press gives at once; null while values are still to be entered. */
export function answerOf(option: FindingOption): Answer | null {
	const fields = option.needsValue ?? [];
	if (fields.length === 0) return { key: option.key };
	if (!isFull(option)) return null;
	return { key: option.key, values: Object.fromEntries(fields.map((f) => [f.key, f.suggested!])) };
}

const RANK = { stop: 0, ask: 1, note: 2 };

/** By level alone, and otherwise as they came: answering one must not make the others jump. */
export const workingOrder = (findings: Finding[]): Finding[] =>
	findings
		.map((f, i) => ({ f, i }))
		.sort((a, b) => RANK[a.f.level] - RANK[b.f.level] || a.i - b.i)
		.map(({ f }) => f);

export function countWords(findings: Finding[]): string {
	const open = (level: Finding['level']) => findings.filter((f) => f.level === level && f.open).length;
	const notes = findings.filter((f) => f.level === 'note').length;
	return `${open('stop')} stop · ${open('ask')} ask · ${notes} note`;
}

const sameAnswer = (a: Answer | undefined, b: Answer | undefined): boolean =>
	a === b || (a !== undefined && b !== undefined && JSON.stringify(a) === JSON.stringify(b));

/**
 * Findings with the answers as they are given now: a press is seen at once, also while the reader still works out what
 * follows from it. A problem with an older answer says nothing about the new one.
 */
export function withAnswers(findings: Finding[], answers: Answers): Finding[] {
	return findings.map((finding) => {
		const answer = Object.hasOwn(answers, finding.id) ? answers[finding.id] : undefined;
		if (sameAnswer(finding.answer, answer)) return finding;
		const { answer: _before, problem: _older, ...rest } = finding;
		return answer ? { ...rest, answer } : rest;
	});
}
