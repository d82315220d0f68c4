import { config } from 'zod';

// The pages' content security policy allows no eval. zod would try it once, and the browser would report that.
config({ jitless: true });
