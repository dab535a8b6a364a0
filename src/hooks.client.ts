import { config } from 'zod/v4/core';

// The content security policy forbids eval; without this zod tries it once and the browser reports it.
config({ jitless: true });
