import { redirect } from '@sveltejs/kit';
import type { PageServerLoad } from './$types';

/** A study opens at its scheme. */
export const load: PageServerLoad = ({ params }) => redirect(303, `/studies/${params.study}/scheme`);
