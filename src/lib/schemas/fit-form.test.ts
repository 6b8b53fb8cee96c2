import { describe, expect, it } from 'vitest';
import { fitForm, optionsOf, readFitForm } from './fit-form';

const SCHEME = '01a23289-0744-77c9-b2bc-cc82d7b7341a';
const RUN = '01a23288-fce5-76ce-9a2c-3ca925927699';
const form = (over: object = {}) => fitForm.parse({ schemeId: SCHEME, runIds: [RUN], ...over });

describe('the form of a fit', () => {
	it('sends nothing that nobody asked for, so that equal requests stay equal', () => {
		const options = optionsOf(form());
		expect(options).not.toHaveProperty('local');
		expect(options).not.toHaveProperty('criterion');
		expect(options).not.toHaveProperty('useTimeZeroRow');
		expect(form().reference).toBe('auto');
	});

	it('takes constants of single runs and the determinant criterion over', () => {
		const options = optionsOf(form({ local: '["s1.forward.kRef"]', criterion: 'determinant' }));
		expect(options.local).toEqual(['s1.forward.kRef']);
		expect(options.criterion).toBe('determinant');
	});

	it('reads what a page posts, and says in words what is wrong', () => {
		const data = new FormData();
		data.set('schemeId', SCHEME);
		data.append('runIds', RUN);
		data.set('local', '["B.responseFactor"]');
		data.set('starts', '0');
		const read = readFitForm(data);
		expect(read.success).toBe(false);
		expect(read.error!.issues[0].message).toBe('At least 1.');
		data.set('starts', '12');
		expect(readFitForm(data).data).toMatchObject({ local: ['B.responseFactor'], starts: 12 });
	});
});
