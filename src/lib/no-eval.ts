import { z } from 'zod'

/**
 * The pages' policy forbids evaluation of text. The checker of answers would otherwise try whether it may compile its
 * checks, and the try alone is reported as a violation. Imported first by every entry (page and worker), and bundled
 * together with the checker (vite.config.ts), because schemas ask for the setting when they are made.
 */
z.config({ jitless: true })
