CREATE TABLE `corrections` (
	`id` text PRIMARY KEY NOT NULL,
	`campaign_id` text NOT NULL,
	`sha256` text NOT NULL,
	`sample` text,
	`instrument` text,
	`segment` integer,
	`field` text NOT NULL,
	`value` text NOT NULL,
	`said` text,
	FOREIGN KEY (`campaign_id`) REFERENCES `campaigns`(`id`) ON UPDATE no action ON DELETE cascade
);
--> statement-breakpoint
CREATE INDEX `corrections_campaign` ON `corrections` (`campaign_id`,`sha256`);--> statement-breakpoint
CREATE TABLE `forecasts` (
	`campaign_id` text NOT NULL,
	`sample` text NOT NULL,
	`position` integer NOT NULL,
	`body` text NOT NULL,
	PRIMARY KEY(`campaign_id`, `sample`, `position`),
	FOREIGN KEY (`campaign_id`) REFERENCES `campaigns`(`id`) ON UPDATE no action ON DELETE cascade
);
--> statement-breakpoint
CREATE TABLE `goals` (
	`campaign_id` text NOT NULL,
	`position` integer NOT NULL,
	`body` text NOT NULL,
	PRIMARY KEY(`campaign_id`, `position`),
	FOREIGN KEY (`campaign_id`) REFERENCES `campaigns`(`id`) ON UPDATE no action ON DELETE cascade
);
--> statement-breakpoint
CREATE TABLE `scan_history` (
	`position` integer PRIMARY KEY AUTOINCREMENT NOT NULL,
	`campaign_id` text NOT NULL,
	`scan_id` text NOT NULL,
	`field` text NOT NULL,
	`before` text,
	`after` text,
	`cause` text NOT NULL,
	`at` integer NOT NULL,
	FOREIGN KEY (`campaign_id`) REFERENCES `campaigns`(`id`) ON UPDATE no action ON DELETE cascade
);
--> statement-breakpoint
CREATE INDEX `scan_history_scan` ON `scan_history` (`scan_id`);--> statement-breakpoint
CREATE TABLE `verdicts` (
	`campaign_id` text NOT NULL,
	`sample` text NOT NULL,
	`position` integer NOT NULL,
	`body` text NOT NULL,
	PRIMARY KEY(`campaign_id`, `sample`, `position`),
	FOREIGN KEY (`campaign_id`) REFERENCES `campaigns`(`id`) ON UPDATE no action ON DELETE cascade
);
--> statement-breakpoint
ALTER TABLE `plans` ADD `advice` text DEFAULT '[]' NOT NULL;--> statement-breakpoint
ALTER TABLE `samples` ADD `judge_key` text;--> statement-breakpoint
ALTER TABLE `samples` ADD `forecast_key` text;--> statement-breakpoint
ALTER TABLE `samples` ADD `peaks_hash` text DEFAULT '' NOT NULL;--> statement-breakpoint
ALTER TABLE `scans` ADD `said` text;--> statement-breakpoint
UPDATE `scans` SET `said` = coalesce(`sheet_row`, case when `sample` is not null then json_object('sample', `sample`, 'instrument', `instrument`, 'role', `role`) end);