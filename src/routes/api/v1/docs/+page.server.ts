import { documentation } from '$lib/server/api/openapi';
import { ERROR_STATUS } from '$lib/server/errors';
import type { PageServerLoad } from './$types';

export const load: PageServerLoad = () => ({ areas: documentation(), errors: Object.entries(ERROR_STATUS) });
