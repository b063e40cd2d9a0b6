import { withAnyone } from '@/lib/http/route';
import { openApi } from '@/lib/http/openapi';

export const GET = withAnyone('GET /openapi.json', () => openApi());
