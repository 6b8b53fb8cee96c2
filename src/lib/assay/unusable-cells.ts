/** Cells that hold no number: dates (B24), errors (B25), formulas without a result (B26), numbers of the other convention (B6), other texts (B11). */
import { type Channel, channelName } from './channels';
import type { Examination } from './examination';
import { plural, someOf } from './wording';
import { askSpots, cellsOf, letter, ofKind, type Spot } from './spots';

export function stopUnusable(ex: Examination, channel: Channel, spots: Spot[]): void {
	const key = letter(channel, spots);
	const dates = ofKind(spots, 'date');
	if (dates.length > 0)
		askSpots(ex, dates, {
			rule: 'B24',
			level: 'stop',
			key,
			found: `a date (${dates[0].reading.text})`,
			expected: 'a number',
			message: `${someOf(cellsOf(dates))} ${dates.length === 1 ? 'holds' : 'hold'} a date (${dates[0].reading.text}). Spreadsheets turn 1.2 into 1 February, so the number is lost here. Enter the value.`
		});
	const errors = ofKind(spots, 'error');
	if (errors.length > 0)
		askSpots(ex, errors, {
			rule: 'B25',
			level: 'stop',
			key,
			found: `the error ${errors[0].reading.text}`,
			expected: 'a number',
			message: `${someOf(cellsOf(errors))} ${errors.length === 1 ? 'holds' : 'hold'} ${errors[0].reading.text}. Correct it in the sheet, enter the value, or leave it as missing.`
		});
	const uncomputed = ofKind(spots, 'uncomputed');
	if (uncomputed.length > 0)
		askSpots(ex, uncomputed, {
			rule: 'B26',
			level: 'stop',
			key,
			found: 'a formula without a stored result',
			expected: 'a number',
			message: `${someOf(cellsOf(uncomputed))} ${uncomputed.length === 1 ? 'is a formula' : 'are formulas'} without a stored result. Open the file, save it in your spreadsheet program, and upload it again.`
		});
}

export function askTexts(ex: Examination, channel: Channel, spots: Spot[]): void {
	const byText = new Map<string, Spot[]>();
	for (const s of ofKind(spots, 'text'))
		byText.set(s.reading.text, [...(byText.get(s.reading.text) ?? []), s]);
	for (const [text, same] of [...byText].slice(0, 50))
		askSpots(ex, same, {
			rule: /^[+-]?[\d.,'\s]+$/.test(text) ? 'B6' : 'B11',
			level: /^[+-]?[\d.,'\s]+$/.test(text) ? 'stop' : 'ask',
			key: `${letter(channel, same)}-${text}`.slice(0, 80),
			found: `"${text.slice(0, 60)}"`,
			expected: 'a number, a limit, or nothing',
			message: `${someOf(cellsOf(same))} ${same.length === 1 ? 'holds' : 'hold'} "${text.slice(0, 60)}", which is no number${ex.decimal ? ` with "${ex.decimal}" as the decimal sign` : ''}. Missing, or a value?`
		});
	const rest = [...byText].slice(50).flatMap(([, same]) => same);
	if (rest.length > 0)
		askSpots(ex, rest, {
			rule: 'B11',
			level: 'ask',
			key: `${letter(channel, rest)}-texts`,
			found: `${plural(rest.length, 'further text')} of other wording`,
			expected: 'numbers, limits, or nothing',
			message: `${plural(rest.length, 'further cell')} of ${channelName(channel)} hold text that is no number. Leave them as missing?`
		});
}
