import { config } from 'zod';

// The page's content security policy forbids making code from text, which zod would try at once:
// imported before any schema is made.
config({ jitless: true });
