CREATE TABLE `advice` (
	`campaign_id` text NOT NULL,
	`sample` text NOT NULL,
	`position` integer NOT NULL,
	`body` text NOT NULL,
	PRIMARY KEY(`campaign_id`, `sample`, `position`),
	FOREIGN KEY (`campaign_id`) REFERENCES `campaigns`(`id`) ON UPDATE no action ON DELETE cascade
);
--> statement-breakpoint
ALTER TABLE `campaigns` ADD `questions_hash` text DEFAULT '' NOT NULL;--> statement-breakpoint
ALTER TABLE `scans` ADD `event_numbers` text;--> statement-breakpoint
ALTER TABLE `plans` DROP COLUMN `advice`;