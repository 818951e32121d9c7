CREATE TABLE `identity` (
	`one` integer PRIMARY KEY NOT NULL,
	`id` text NOT NULL,
	CONSTRAINT "identity_one" CHECK("identity"."one" = 1)
);
--> statement-breakpoint
CREATE TABLE `replies` (
	`lab` text NOT NULL,
	`key` text NOT NULL,
	`request` text NOT NULL,
	`status` integer,
	`content_type` text,
	`location` text,
	`body` text,
	`created_at` integer NOT NULL,
	PRIMARY KEY(`lab`, `key`)
);
--> statement-breakpoint
CREATE INDEX `replies_age` ON `replies` (`created_at`);--> statement-breakpoint
CREATE TABLE `tokens` (
	`id` text PRIMARY KEY NOT NULL,
	`lab` text NOT NULL,
	`role` text NOT NULL,
	`hash` text NOT NULL,
	`created_at` integer NOT NULL,
	`expires_at` integer NOT NULL,
	`revoked_at` integer
);
--> statement-breakpoint
CREATE UNIQUE INDEX `tokens_hash` ON `tokens` (`hash`);