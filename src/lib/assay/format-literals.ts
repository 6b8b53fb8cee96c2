/**
 * What a number format writes beside the number: `0.0 "mM"` shows 300 as "300.0 mM", `"<"0.0` shows 2 as "<2.0", and a zero section
 * "n.d." shows 0 as "n.d.". Whoever read the sheet saw that text, so the reader has to know it.
 * Sections and conditions: ECMA-376-1 (5th ed., 2016), section 18.8.31.
 */

const TOKENS = /"[^"]*"|\\.|[_*].|\[[^\]]*\]|General|[#0?.,]*[#0?][#0?.,/]*(?:E[+-]?[#0?]+)?|./gi;
const CONDITION = /^\[(<=|>=|<>|<|>|=)(-?\d+(?:\.\d+)?)\]$/;

/** Sections of a code; a semicolon inside quotes or behind a backslash parts nothing. */
function sectionsOf(code: string): string[] {
	const sections = [''];
	for (const token of code.match(/"[^"]*"|\\.|[^]/g) ?? []) {
		if (token === ';') sections.push('');
		else sections[sections.length - 1] += token;
	}
	return sections;
}

function holds(condition: RegExpExecArray, value: number): boolean {
	const limit = Number(condition[2]);
	switch (condition[1]) {
		case '<':
			return value < limit;
		case '<=':
			return value <= limit;
		case '>':
			return value > limit;
		case '>=':
			return value >= limit;
		case '=':
			return value === limit;
		default:
			return value !== limit;
	}
}

function conditionOf(section: string): RegExpExecArray | null {
	for (const bracket of section.match(/\[[^\]]*\]/g) ?? []) {
		const condition = CONDITION.exec(bracket);
		if (condition) return condition;
	}
	return null;
}

/** The section that shows this value. */
function sectionFor(code: string, value: number): string {
	const sections = sectionsOf(code);
	const numbers = sections.length > 3 ? sections.slice(0, 3) : sections;
	if (numbers.some((s) => conditionOf(s))) {
		const met = numbers.find((s) => {
			const condition = conditionOf(s);
			return condition !== null && holds(condition, value);
		});
		return met ?? numbers.findLast((s) => !conditionOf(s)) ?? numbers[0];
	}
	if (value < 0 && numbers.length > 1) return numbers[1];
	if (value === 0 && numbers.length > 2) return numbers[2];
	return numbers[0];
}

/**
 * The text that a format makes of a number, with the stored number where the format writes one; null where the format adds nothing
 * to it, or no text that a person would read (spaces, brackets, a currency).
 */
export function textAround(code: string, value: number): string | null {
	if (!/["\\<>a-z%~]/i.test(code) || code === 'General') return null;
	let text = '';
	let added = false;
	let placed = false;
	for (const token of sectionFor(code, value).match(TOKENS) ?? []) {
		if (/^(?:[_*].|\[)/s.test(token)) continue;
		const literal = token[0] === '"' ? token.slice(1, -1) : token[0] === '\\' ? token.slice(1) : null;
		if (literal === null && (token.toLowerCase() === 'general' || /[#0?]/.test(token))) {
			text += placed ? '' : String(value);
			placed = true;
			continue;
		}
		text += literal ?? token;
		added ||= /[\p{L}<>≤≥%~]/u.test(literal ?? token);
	}
	return added ? text.trim() : null;
}
