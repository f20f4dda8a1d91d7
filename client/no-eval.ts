import { config } from 'zod';

// The content policy forbids making code from text: the schemas must not even try. Imported before any of them.
config({ jitless: true });
