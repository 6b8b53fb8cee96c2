/** The choices of this person on this device; static/shift.js applies them before the first paint. */
export type ShiftChoice = 'day' | 'night' | 'system';

export const look = $state<{ shift: ShiftChoice; gloves: boolean }>({ shift: 'system', gloves: false });

const remember = (name: string, value: string | null): void => {
	try {
		if (value === null) localStorage.removeItem(`ratewright.${name}`);
		else localStorage.setItem(`ratewright.${name}`, value);
	} catch {
		// A browser that keeps nothing: the choice holds for this page.
	}
};

/** Takes over what the script before the first paint found. */
export function readLook(): void {
	const { shiftChoice, gloves } = document.documentElement.dataset;
	look.shift = shiftChoice === 'day' || shiftChoice === 'night' ? shiftChoice : 'system';
	look.gloves = gloves === 'on';
}

export function chooseShift(choice: ShiftChoice): void {
	const root = document.documentElement;
	const night = window.matchMedia('(prefers-color-scheme: dark)').matches;
	root.dataset.shift = choice === 'system' ? (night ? 'night' : 'day') : choice;
	root.dataset.shiftChoice = choice;
	look.shift = choice;
	remember('shift', choice === 'system' ? null : choice);
	window.dispatchEvent(new CustomEvent('shiftchange'));
}

export function chooseGloves(on: boolean): void {
	document.documentElement.dataset.gloves = on ? 'on' : 'off';
	look.gloves = on;
	remember('gloves', on ? 'on' : null);
	window.dispatchEvent(new CustomEvent('shiftchange'));
}
