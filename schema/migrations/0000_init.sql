CREATE TABLE `campaigns` (
	`id` text PRIMARY KEY NOT NULL,
	`lab` text NOT NULL,
	`name` text NOT NULL,
	`created_at` integer NOT NULL,
	`revision` integer DEFAULT 0 NOT NULL,
	`inputs_revision` integer DEFAULT 0 NOT NULL,
	`queued_revision` integer DEFAULT 0 NOT NULL
);
--> statement-breakpoint
CREATE UNIQUE INDEX `campaigns_name` ON `campaigns` (`lab`,`name`);--> statement-breakpoint
CREATE TABLE `fence` (
	`ok` integer PRIMARY KEY NOT NULL,
	CONSTRAINT "fence_ok" CHECK("fence"."ok" = 1)
);
--> statement-breakpoint
CREATE TABLE `files` (
	`id` text PRIMARY KEY NOT NULL,
	`campaign_id` text NOT NULL,
	`path` text NOT NULL,
	`sha256` text NOT NULL,
	`bytes` integer NOT NULL,
	`blob_key` text NOT NULL,
	`kind` text NOT NULL,
	`archive_id` text,
	`superseded` integer DEFAULT false NOT NULL,
	`state` text NOT NULL,
	`reason` text,
	`columns_key` text,
	`highest_rate_k_per_s` real,
	`flags` text DEFAULT '[]' NOT NULL,
	`created_at` integer NOT NULL,
	FOREIGN KEY (`campaign_id`) REFERENCES `campaigns`(`id`) ON UPDATE no action ON DELETE cascade
);
--> statement-breakpoint
CREATE UNIQUE INDEX `files_live_path` ON `files` (`campaign_id`,`path`) WHERE superseded = 0;--> statement-breakpoint
CREATE INDEX `files_hash` ON `files` (`campaign_id`,`sha256`);--> statement-breakpoint
CREATE INDEX `files_archive` ON `files` (`archive_id`);--> statement-breakpoint
CREATE TABLE `flags` (
	`campaign_id` text NOT NULL,
	`source` text NOT NULL,
	`position` integer NOT NULL,
	`body` text NOT NULL,
	PRIMARY KEY(`campaign_id`, `source`, `position`),
	FOREIGN KEY (`campaign_id`) REFERENCES `campaigns`(`id`) ON UPDATE no action ON DELETE cascade
);
--> statement-breakpoint
CREATE TABLE `instruments` (
	`id` text PRIMARY KEY NOT NULL,
	`campaign_id` text NOT NULL,
	`instrument` text NOT NULL,
	`sheet_row` text,
	`inputs_revision` integer DEFAULT 1 NOT NULL,
	`queued_revision` integer DEFAULT 0 NOT NULL,
	`calibrated_revision` integer DEFAULT 0 NOT NULL,
	`highest_rate_k_per_s` real DEFAULT 0 NOT NULL,
	`calibration` text,
	FOREIGN KEY (`campaign_id`) REFERENCES `campaigns`(`id`) ON UPDATE no action ON DELETE cascade
);
--> statement-breakpoint
CREATE UNIQUE INDEX `instruments_name` ON `instruments` (`campaign_id`,`instrument`);--> statement-breakpoint
CREATE TABLE `jobs` (
	`id` text PRIMARY KEY NOT NULL,
	`campaign_id` text NOT NULL,
	`step` text NOT NULL,
	`subject` text NOT NULL,
	`priority` integer NOT NULL,
	`state` text NOT NULL,
	`attempts` integer DEFAULT 0 NOT NULL,
	`generation` integer DEFAULT 0 NOT NULL,
	`leased_by` text,
	`leased_until` integer,
	`next_try_at` integer NOT NULL,
	`last_error` text,
	`woken` integer DEFAULT false NOT NULL,
	`created_at` integer NOT NULL,
	`started_at` integer,
	`finished_at` integer,
	FOREIGN KEY (`campaign_id`) REFERENCES `campaigns`(`id`) ON UPDATE no action ON DELETE cascade
);
--> statement-breakpoint
CREATE INDEX `jobs_due` ON `jobs` (`state`,`priority`);--> statement-breakpoint
CREATE UNIQUE INDEX `jobs_one_waiting` ON `jobs` (`step`,`subject`) WHERE state = 'queued';--> statement-breakpoint
CREATE INDEX `jobs_running` ON `jobs` (`step`,`subject`) WHERE state = 'running';--> statement-breakpoint
CREATE INDEX `jobs_campaign` ON `jobs` (`campaign_id`,`state`,`step`);--> statement-breakpoint
CREATE TABLE `parameters` (
	`campaign_id` text NOT NULL,
	`sample` text NOT NULL,
	`position` integer NOT NULL,
	`event` integer NOT NULL,
	`quantity` text NOT NULL,
	`method` text NOT NULL,
	`conversion` real,
	`temperature_k` real,
	`value` real NOT NULL,
	`unit` text NOT NULL,
	`lower95` real,
	`upper95` real,
	`scan_count` integer NOT NULL,
	`rate_min_k_per_s` real NOT NULL,
	`rate_max_k_per_s` real NOT NULL,
	`flags` text NOT NULL,
	`interval` text NOT NULL,
	`variant` text NOT NULL,
	PRIMARY KEY(`campaign_id`, `sample`, `position`),
	FOREIGN KEY (`campaign_id`) REFERENCES `campaigns`(`id`) ON UPDATE no action ON DELETE cascade
);
--> statement-breakpoint
CREATE INDEX `parameters_quantity` ON `parameters` (`campaign_id`,`quantity`,`method`);--> statement-breakpoint
CREATE TABLE `plans` (
	`campaign_id` text PRIMARY KEY NOT NULL,
	`coverage` text NOT NULL,
	`gaps` text NOT NULL,
	FOREIGN KEY (`campaign_id`) REFERENCES `campaigns`(`id`) ON UPDATE no action ON DELETE cascade
);
--> statement-breakpoint
CREATE TABLE `samples` (
	`id` text PRIMARY KEY NOT NULL,
	`campaign_id` text NOT NULL,
	`sample` text NOT NULL,
	`state` text NOT NULL,
	`reason` text,
	`inputs_revision` integer DEFAULT 1 NOT NULL,
	`queued_revision` integer DEFAULT 0 NOT NULL,
	`fit_key` text,
	`reports` text DEFAULT '[]' NOT NULL,
	FOREIGN KEY (`campaign_id`) REFERENCES `campaigns`(`id`) ON UPDATE no action ON DELETE cascade
);
--> statement-breakpoint
CREATE UNIQUE INDEX `samples_name` ON `samples` (`campaign_id`,`sample`);--> statement-breakpoint
CREATE INDEX `samples_state` ON `samples` (`campaign_id`,`state`);--> statement-breakpoint
CREATE TABLE `scans` (
	`id` text PRIMARY KEY NOT NULL,
	`campaign_id` text NOT NULL,
	`file_id` text NOT NULL,
	`disposition` text NOT NULL,
	`sample` text,
	`instrument` text,
	`role` text DEFAULT 'sample' NOT NULL,
	`segment` integer,
	`sheet_row` text,
	`sheet_hash` text DEFAULT '' NOT NULL,
	`inputs_revision` integer DEFAULT 1 NOT NULL,
	`queued_revision` integer DEFAULT 0 NOT NULL,
	`status` text NOT NULL,
	`reason` text,
	`reduced_key` text,
	`result` text,
	`flags` text DEFAULT '[]' NOT NULL,
	FOREIGN KEY (`campaign_id`) REFERENCES `campaigns`(`id`) ON UPDATE no action ON DELETE cascade,
	FOREIGN KEY (`file_id`) REFERENCES `files`(`id`) ON UPDATE no action ON DELETE cascade
);
--> statement-breakpoint
CREATE INDEX `scans_sample` ON `scans` (`campaign_id`,`sample`,`status`);--> statement-breakpoint
CREATE INDEX `scans_instrument` ON `scans` (`campaign_id`,`instrument`,`status`);--> statement-breakpoint
CREATE INDEX `scans_file` ON `scans` (`file_id`);--> statement-breakpoint
CREATE TABLE `sheet_rows` (
	`campaign_id` text NOT NULL,
	`file_id` text NOT NULL,
	`sheet` text NOT NULL,
	`position` integer NOT NULL,
	`body` text NOT NULL,
	PRIMARY KEY(`file_id`, `position`),
	FOREIGN KEY (`campaign_id`) REFERENCES `campaigns`(`id`) ON UPDATE no action ON DELETE cascade,
	FOREIGN KEY (`file_id`) REFERENCES `files`(`id`) ON UPDATE no action ON DELETE cascade
);
--> statement-breakpoint
CREATE INDEX `sheet_rows_sheet` ON `sheet_rows` (`campaign_id`,`sheet`);