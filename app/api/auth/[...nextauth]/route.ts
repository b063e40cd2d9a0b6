import { authHandlers } from '@/lib/auth/handlers';

export const { GET, POST } = authHandlers;
