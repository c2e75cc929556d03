import { defineConfig } from 'drizzle-kit'

export default defineConfig({ dialect: 'mysql', schema: './drizzle/schema/index.ts', out: './drizzle/migrations' })
