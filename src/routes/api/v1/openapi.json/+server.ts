import { openApi } from '$lib/server/api/openapi';
import { api } from '$lib/server/http';
import { settings } from '$lib/server/settings';

export const GET = api(() => openApi(settings().ORIGIN));
