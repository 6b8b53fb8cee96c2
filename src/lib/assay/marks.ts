/** Numbers that carry a mark: "~0.2", "0.50 ± 0.01", "0.52*", "(0.5)". The mark is parted from the number; what it means is asked. */
import { readUnit } from './units';

export type MarkKind = 'about' | 'spread' | 'note' | 'brackets';

export interface Mark {
	kind: MarkKind;
	/** The text without the mark. */
	core: string;
	/** The mark: "~", "± 0.01", "*". */
	sign: string;
}

const ABOUT =
	/^(~|≈|∼|≅|ca\.?|circa|c\.|approx\.?|approximately|about|around|etwa|ungef[äa]hr|env\.?|environ)\s*(.+)$/i;
const SPREAD = /^(.*\d)\s*((?:±|\+\/[-\u2212]|\+[-\u2212])\s*[\d.,]+\s*%?)$/;
const SPREAD_IN_BRACKETS = /^(.*\d)\s*([([]\s*(?:±|\+\/-|sd|se|s|rsd)?\s*[=:]?\s*[\d.,]+\s*%?\s*[)\]])$/i;
const BRACKETS = /^([([])\s*(.*\d.*?)\s*[)\]]$/;
const BEHIND =
	/^(.*[\d%])\s*(\*{1,3}|[†‡§¶#!?]|[¹²³⁴-⁹]+|\^?[a-z](?:,\s?[a-z]){0,3}\)?|\d\)|[([][^()[\]]{1,30}[)\]])$/i;
const BEFORE = /^(\*{1,3}|[†‡§¶#?])\s*(.*\d.*)$/;

/** Null when the text carries no mark that is known here; whether the rest is a number is for the caller to see. */
export function readMark(text: string): Mark | null {
	if (text.length > 60 || !/\d/.test(text)) return null;
	const about = ABOUT.exec(text);
	if (about) return { kind: 'about', core: about[2].trim(), sign: about[1] };
	const spread = SPREAD.exec(text) ?? SPREAD_IN_BRACKETS.exec(text);
	if (spread) return { kind: 'spread', core: spread[1].trim(), sign: spread[2] };
	const inside = BRACKETS.exec(text);
	if (inside) return { kind: 'brackets', core: inside[2], sign: inside[1] === '(' ? '( )' : '[ ]' };
	const behind = BEHIND.exec(text);
	if (behind && !readUnit(behind[2].replace(/^[([]|[)\]]$/g, '')))
		return { kind: 'note', core: behind[1].trim(), sign: behind[2] };
	const before = BEFORE.exec(text);
	return before ? { kind: 'note', core: before[2], sign: before[1] } : null;
}
