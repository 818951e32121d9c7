import { defineConfig } from 'drizzle-kit';

export default defineConfig({ dialect: 'sqlite', schema: './schema/tables/index.ts', out: './schema/migrations' });
