CREATE TABLE `api_tokens` (
	`id` char(16) character set ascii collate ascii_bin NOT NULL,
	`team_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`user_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`name` varchar(120) NOT NULL,
	`prefix` varchar(16) NOT NULL,
	`token_sha` binary(32) NOT NULL,
	`scope` varchar(4) NOT NULL,
	`created_at` datetime(3) NOT NULL,
	`ends_at` datetime(3),
	`used_at` datetime(3),
	`revoked_at` datetime(3),
	CONSTRAINT `api_tokens_id` PRIMARY KEY(`id`),
	CONSTRAINT `api_tokens_token` UNIQUE(`token_sha`)
);
--> statement-breakpoint
CREATE TABLE `columns` (
	`id` char(16) character set ascii collate ascii_bin NOT NULL,
	`ensemble_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`name` varchar(120) NOT NULL,
	`kind` varchar(10) NOT NULL,
	`ordinal` int NOT NULL,
	`energy_kind` varchar(12),
	`temperature` double,
	`unit` varchar(40),
	`rule` varchar(10),
	`origin` varchar(200),
	`count` int NOT NULL,
	`data` longblob NOT NULL,
	`created_at` datetime(3) NOT NULL,
	CONSTRAINT `columns_id` PRIMARY KEY(`id`),
	CONSTRAINT `columns_name` UNIQUE(`ensemble_id`,`name`)
);
--> statement-breakpoint
CREATE TABLE `ensemble_files` (
	`ensemble_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`position` int NOT NULL,
	`batch` int NOT NULL,
	`source_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`name` varchar(255) NOT NULL,
	`format` varchar(20) NOT NULL,
	`first_frame` int NOT NULL,
	`frames` int NOT NULL,
	CONSTRAINT `ensemble_files_ensemble_id_position_pk` PRIMARY KEY(`ensemble_id`,`position`)
);
--> statement-breakpoint
CREATE TABLE `ensembles` (
	`id` char(16) character set ascii collate ascii_bin NOT NULL,
	`team_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`series_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`name` varchar(200) NOT NULL,
	`files_sha` binary(32),
	`answers` json NOT NULL,
	`example` boolean NOT NULL DEFAULT false,
	`formula` varchar(120) NOT NULL,
	`atoms` int NOT NULL,
	`elements` longblob NOT NULL,
	`bonds` longblob NOT NULL,
	`atom_labels` json,
	`chirality` varchar(10) NOT NULL,
	`chirality_note` varchar(500) NOT NULL DEFAULT '',
	`frames` int NOT NULL,
	`accepted` int NOT NULL,
	`remarked` int NOT NULL,
	`held` int NOT NULL,
	`open_questions` int NOT NULL,
	`accepted_sha` binary(32) NOT NULL,
	`reader_version` varchar(20) NOT NULL,
	`created_by` char(16) character set ascii collate ascii_bin,
	`created_by_token` char(16) character set ascii collate ascii_bin,
	`version` int NOT NULL DEFAULT 1,
	`created_at` datetime(3) NOT NULL,
	`changed_at` datetime(3) NOT NULL,
	`deleted_at` datetime(3),
	CONSTRAINT `ensembles_id` PRIMARY KEY(`id`),
	CONSTRAINT `ensembles_files` UNIQUE(`team_id`,`files_sha`)
);
--> statement-breakpoint
CREATE TABLE `frame_blocks` (
	`ensemble_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`shape` int NOT NULL,
	`first` int NOT NULL,
	`count` int NOT NULL,
	`data` longblob NOT NULL,
	`sha256` binary(32) NOT NULL,
	CONSTRAINT `frame_blocks_ensemble_id_shape_first_pk` PRIMARY KEY(`ensemble_id`,`shape`,`first`)
);
--> statement-breakpoint
CREATE TABLE `frames` (
	`ensemble_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`number` int NOT NULL,
	`file` int NOT NULL,
	`line` int NOT NULL,
	`shape` int,
	`index_in_shape` int,
	`label` varchar(200),
	`comment` text NOT NULL,
	`state` varchar(8) NOT NULL,
	`read_state` varchar(8) NOT NULL,
	`hold_reason` varchar(24),
	`note` varchar(1000),
	CONSTRAINT `frames_ensemble_id_number_pk` PRIMARY KEY(`ensemble_id`,`number`)
);
--> statement-breakpoint
CREATE TABLE `intake_messages` (
	`ensemble_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`position` int NOT NULL,
	`code` varchar(8) NOT NULL,
	`severity` varchar(8) NOT NULL,
	`file` varchar(255) NOT NULL,
	`line` int,
	`column` int,
	`frame` int,
	`atom` int,
	`found` varchar(400),
	`message` varchar(1000) NOT NULL,
	`hint` varchar(500),
	CONSTRAINT `intake_messages_ensemble_id_position_pk` PRIMARY KEY(`ensemble_id`,`position`)
);
--> statement-breakpoint
CREATE TABLE `jobs` (
	`id` char(16) character set ascii collate ascii_bin NOT NULL,
	`definition` varchar(40) NOT NULL,
	`version` int NOT NULL,
	`team_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`user_id` char(16) character set ascii collate ascii_bin,
	`payload` json NOT NULL,
	`state` varchar(10) NOT NULL,
	`progress` double NOT NULL DEFAULT 0,
	`attempts` tinyint NOT NULL DEFAULT 0,
	`holder` varchar(40),
	`lease_until` datetime(3),
	`error` varchar(500),
	`created_at` datetime(3) NOT NULL,
	`started_at` datetime(3),
	`finished_at` datetime(3),
	CONSTRAINT `jobs_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `logbook` (
	`id` bigint AUTO_INCREMENT NOT NULL,
	`team_id` char(16) character set ascii collate ascii_bin,
	`ensemble_id` char(16) character set ascii collate ascii_bin,
	`user_id` char(16) character set ascii collate ascii_bin,
	`token_id` char(16) character set ascii collate ascii_bin,
	`type` varchar(40) NOT NULL,
	`data` json NOT NULL,
	`origin` varchar(64),
	`created_at` datetime(3) NOT NULL,
	CONSTRAINT `logbook_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `mail_queue` (
	`id` char(16) character set ascii collate ascii_bin NOT NULL,
	`recipient` varchar(254) NOT NULL,
	`subject` varchar(200) NOT NULL,
	`body` text NOT NULL,
	`attempts` tinyint NOT NULL DEFAULT 0,
	`next_try_at` datetime(3) NOT NULL,
	`sent_at` datetime(3),
	`failed_at` datetime(3),
	`created_at` datetime(3) NOT NULL,
	CONSTRAINT `mail_queue_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `mail_tokens` (
	`token_sha` binary(32) NOT NULL,
	`user_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`purpose` varchar(20) NOT NULL,
	`created_at` datetime(3) NOT NULL,
	`ends_at` datetime(3) NOT NULL,
	`used_at` datetime(3),
	CONSTRAINT `mail_tokens_token_sha` PRIMARY KEY(`token_sha`)
);
--> statement-breakpoint
CREATE TABLE `members` (
	`team_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`user_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`role` varchar(10) NOT NULL,
	`created_at` datetime(3) NOT NULL,
	CONSTRAINT `members_team_id_user_id_pk` PRIMARY KEY(`team_id`,`user_id`)
);
--> statement-breakpoint
CREATE TABLE `questions` (
	`ensemble_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`id` varchar(40) NOT NULL,
	`position` int NOT NULL,
	`code` varchar(40) NOT NULL,
	`text` varchar(500) NOT NULL,
	`reason` varchar(500),
	`options` json NOT NULL,
	`answered` varchar(200),
	`answered_by` char(16) character set ascii collate ascii_bin,
	`answered_at` datetime(3),
	CONSTRAINT `questions_ensemble_id_id_pk` PRIMARY KEY(`ensemble_id`,`id`)
);
--> statement-breakpoint
CREATE TABLE `series` (
	`id` char(16) character set ascii collate ascii_bin NOT NULL,
	`team_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`name` varchar(120) NOT NULL,
	`created_at` datetime(3) NOT NULL,
	CONSTRAINT `series_id` PRIMARY KEY(`id`),
	CONSTRAINT `series_name` UNIQUE(`team_id`,`name`)
);
--> statement-breakpoint
CREATE TABLE `sessions` (
	`id` char(16) character set ascii collate ascii_bin NOT NULL,
	`token_sha` binary(32) NOT NULL,
	`user_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`created_at` datetime(3) NOT NULL,
	`seen_at` datetime(3) NOT NULL,
	`ends_at` datetime(3) NOT NULL,
	`stay` boolean NOT NULL DEFAULT false,
	`user_agent` varchar(255),
	CONSTRAINT `sessions_id` PRIMARY KEY(`id`),
	CONSTRAINT `sessions_token` UNIQUE(`token_sha`)
);
--> statement-breakpoint
CREATE TABLE `sifts` (
	`id` char(16) character set ascii collate ascii_bin NOT NULL,
	`ensemble_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`recipe_sha` binary(32) NOT NULL,
	`input_sha` binary(32) NOT NULL,
	`recipe` json NOT NULL,
	`job_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`kept_count` int,
	`result` longtext,
	`code_version` varchar(40),
	`created_by` char(16) character set ascii collate ascii_bin,
	`created_at` datetime(3) NOT NULL,
	CONSTRAINT `sifts_id` PRIMARY KEY(`id`),
	CONSTRAINT `sifts_same` UNIQUE(`ensemble_id`,`recipe_sha`,`input_sha`)
);
--> statement-breakpoint
CREATE TABLE `source_chunks` (
	`source_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`position` int NOT NULL,
	`data` longblob NOT NULL,
	CONSTRAINT `source_chunks_source_id_position_pk` PRIMARY KEY(`source_id`,`position`)
);
--> statement-breakpoint
CREATE TABLE `sources` (
	`id` char(16) character set ascii collate ascii_bin NOT NULL,
	`team_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`sha256` binary(32),
	`bytes` bigint NOT NULL,
	`chunks` int NOT NULL,
	`created_at` datetime(3) NOT NULL,
	CONSTRAINT `sources_id` PRIMARY KEY(`id`),
	CONSTRAINT `sources_sha` UNIQUE(`team_id`,`sha256`)
);
--> statement-breakpoint
CREATE TABLE `teams` (
	`id` char(16) character set ascii collate ascii_bin NOT NULL,
	`name` varchar(120) NOT NULL,
	`demo` boolean NOT NULL DEFAULT false,
	`created_at` datetime(3) NOT NULL,
	CONSTRAINT `teams_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `throttles` (
	`name` varchar(191) NOT NULL,
	`count` int NOT NULL,
	`window_start` datetime(3) NOT NULL,
	CONSTRAINT `throttles_name` PRIMARY KEY(`name`)
);
--> statement-breakpoint
CREATE TABLE `users` (
	`id` char(16) character set ascii collate ascii_bin NOT NULL,
	`email` varchar(254) NOT NULL,
	`name` varchar(120) NOT NULL,
	`password_hash` varchar(255) NOT NULL,
	`demo` boolean NOT NULL DEFAULT false,
	`created_at` datetime(3) NOT NULL,
	`disabled_at` datetime(3),
	CONSTRAINT `users_id` PRIMARY KEY(`id`),
	CONSTRAINT `users_email` UNIQUE(`email`)
);
--> statement-breakpoint
ALTER TABLE `api_tokens` ADD CONSTRAINT `api_tokens_team_id_teams_id_fk` FOREIGN KEY (`team_id`) REFERENCES `teams`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `api_tokens` ADD CONSTRAINT `api_tokens_user_id_users_id_fk` FOREIGN KEY (`user_id`) REFERENCES `users`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `columns` ADD CONSTRAINT `columns_ensemble_id_ensembles_id_fk` FOREIGN KEY (`ensemble_id`) REFERENCES `ensembles`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `ensemble_files` ADD CONSTRAINT `ensemble_files_ensemble_id_ensembles_id_fk` FOREIGN KEY (`ensemble_id`) REFERENCES `ensembles`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `ensemble_files` ADD CONSTRAINT `ensemble_files_source_id_sources_id_fk` FOREIGN KEY (`source_id`) REFERENCES `sources`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `ensembles` ADD CONSTRAINT `ensembles_team_id_teams_id_fk` FOREIGN KEY (`team_id`) REFERENCES `teams`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `ensembles` ADD CONSTRAINT `ensembles_series_id_series_id_fk` FOREIGN KEY (`series_id`) REFERENCES `series`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `ensembles` ADD CONSTRAINT `ensembles_created_by_users_id_fk` FOREIGN KEY (`created_by`) REFERENCES `users`(`id`) ON DELETE set null ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `frame_blocks` ADD CONSTRAINT `frame_blocks_ensemble_id_ensembles_id_fk` FOREIGN KEY (`ensemble_id`) REFERENCES `ensembles`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `frames` ADD CONSTRAINT `frames_ensemble_id_ensembles_id_fk` FOREIGN KEY (`ensemble_id`) REFERENCES `ensembles`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `intake_messages` ADD CONSTRAINT `intake_messages_ensemble_id_ensembles_id_fk` FOREIGN KEY (`ensemble_id`) REFERENCES `ensembles`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `jobs` ADD CONSTRAINT `jobs_team_id_teams_id_fk` FOREIGN KEY (`team_id`) REFERENCES `teams`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `mail_tokens` ADD CONSTRAINT `mail_tokens_user_id_users_id_fk` FOREIGN KEY (`user_id`) REFERENCES `users`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `members` ADD CONSTRAINT `members_team_id_teams_id_fk` FOREIGN KEY (`team_id`) REFERENCES `teams`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `members` ADD CONSTRAINT `members_user_id_users_id_fk` FOREIGN KEY (`user_id`) REFERENCES `users`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `questions` ADD CONSTRAINT `questions_ensemble_id_ensembles_id_fk` FOREIGN KEY (`ensemble_id`) REFERENCES `ensembles`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `series` ADD CONSTRAINT `series_team_id_teams_id_fk` FOREIGN KEY (`team_id`) REFERENCES `teams`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `sessions` ADD CONSTRAINT `sessions_user_id_users_id_fk` FOREIGN KEY (`user_id`) REFERENCES `users`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `sifts` ADD CONSTRAINT `sifts_ensemble_id_ensembles_id_fk` FOREIGN KEY (`ensemble_id`) REFERENCES `ensembles`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `source_chunks` ADD CONSTRAINT `source_chunks_source_id_sources_id_fk` FOREIGN KEY (`source_id`) REFERENCES `sources`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `sources` ADD CONSTRAINT `sources_team_id_teams_id_fk` FOREIGN KEY (`team_id`) REFERENCES `teams`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
CREATE INDEX `api_tokens_team` ON `api_tokens` (`team_id`);--> statement-breakpoint
CREATE INDEX `ensemble_files_source` ON `ensemble_files` (`source_id`);--> statement-breakpoint
CREATE INDEX `ensembles_team` ON `ensembles` (`team_id`,`created_at`);--> statement-breakpoint
CREATE INDEX `ensembles_series` ON `ensembles` (`series_id`);--> statement-breakpoint
CREATE INDEX `jobs_state` ON `jobs` (`state`,`created_at`);--> statement-breakpoint
CREATE INDEX `logbook_team` ON `logbook` (`team_id`,`id`);--> statement-breakpoint
CREATE INDEX `logbook_ensemble` ON `logbook` (`ensemble_id`,`id`);--> statement-breakpoint
CREATE INDEX `mail_queue_due` ON `mail_queue` (`sent_at`,`next_try_at`);--> statement-breakpoint
CREATE INDEX `mail_tokens_user` ON `mail_tokens` (`user_id`);--> statement-breakpoint
CREATE INDEX `members_user` ON `members` (`user_id`);--> statement-breakpoint
CREATE INDEX `sessions_user` ON `sessions` (`user_id`);--> statement-breakpoint
CREATE INDEX `sifts_ensemble` ON `sifts` (`ensemble_id`,`created_at`);