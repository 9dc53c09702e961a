/** @type {import('next').NextConfig} */
const config = {
  agentRules: false,
  experimental: { agentUpgrade: false },
  distDir: process.env.FIRSTLOW_DIST ?? ".next",
  poweredByHeader: false,
  // "npm test" checks the types of the whole tree; building on somebody's machine need not do it again.
  typescript: { ignoreBuildErrors: true },
  reactStrictMode: true,
  // A browser asks for this by itself where it has not seen the page's own icon yet.
  rewrites: async () => [{ source: "/favicon.ico", destination: "/icon.svg" }],
  serverExternalPackages: [
    "@mikro-orm/core",
    "@mikro-orm/knex",
    "@mikro-orm/migrations",
    "@mikro-orm/postgresql",
    "@node-rs/argon2",
    "nodemailer",
    "pg",
  ],
};

export default config;
