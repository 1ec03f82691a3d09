CREATE TABLE `batches` (
	`ensemble_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`batch` int NOT NULL,
	`files_sha` binary(32) NOT NULL,
	`answers` json NOT NULL,
	`name` varchar(200),
	`created_by` char(16) character set ascii collate ascii_bin,
	`created_by_token` char(16) character set ascii collate ascii_bin,
	`created_at` datetime(3) NOT NULL,
	CONSTRAINT `batches_ensemble_id_batch_pk` PRIMARY KEY(`ensemble_id`,`batch`),
	CONSTRAINT `batches_files` UNIQUE(`ensemble_id`,`files_sha`)
);
--> statement-breakpoint
CREATE TABLE `editions` (
	`id` char(16) character set ascii collate ascii_bin NOT NULL,
	`team_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`ensemble_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`number` int NOT NULL,
	`title` varchar(200) NOT NULL,
	`remark` text NOT NULL,
	`recipe` json NOT NULL,
	`inputs` json NOT NULL,
	`code_version` varchar(40) NOT NULL,
	`content` longtext NOT NULL,
	`content_sha` binary(32) NOT NULL,
	`positions` longblob NOT NULL,
	`files` json NOT NULL,
	`created_by` char(16) character set ascii collate ascii_bin,
	`created_at` datetime(3) NOT NULL,
	CONSTRAINT `editions_id` PRIMARY KEY(`id`),
	CONSTRAINT `editions_number` UNIQUE(`ensemble_id`,`number`)
);
--> statement-breakpoint
CREATE TABLE `invitations` (
	`id` char(16) character set ascii collate ascii_bin NOT NULL,
	`team_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`email` varchar(254) NOT NULL,
	`role` varchar(10) NOT NULL,
	`token_sha` binary(32) NOT NULL,
	`created_by` char(16) character set ascii collate ascii_bin,
	`created_at` datetime(3) NOT NULL,
	`ends_at` datetime(3) NOT NULL,
	`used_at` datetime(3),
	`revoked_at` datetime(3),
	CONSTRAINT `invitations_id` PRIMARY KEY(`id`),
	CONSTRAINT `invitations_token` UNIQUE(`token_sha`)
);
--> statement-breakpoint
CREATE TABLE `links` (
	`id` char(16) character set ascii collate ascii_bin NOT NULL,
	`team_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`edition_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`secret_sha` binary(32) NOT NULL,
	`prefix` varchar(8) NOT NULL,
	`label` varchar(120) NOT NULL DEFAULT '',
	`contact` varchar(200) NOT NULL DEFAULT '',
	`sources` boolean NOT NULL DEFAULT false,
	`logbook` boolean NOT NULL DEFAULT false,
	`created_by` char(16) character set ascii collate ascii_bin,
	`created_at` datetime(3) NOT NULL,
	`ends_at` datetime(3) NOT NULL,
	`revoked_at` datetime(3),
	`opened` int NOT NULL DEFAULT 0,
	`opened_at` datetime(3),
	`reminded_at` datetime(3),
	CONSTRAINT `links_id` PRIMARY KEY(`id`),
	CONSTRAINT `links_secret` UNIQUE(`secret_sha`)
);
--> statement-breakpoint
CREATE TABLE `outside_structures` (
	`id` char(16) character set ascii collate ascii_bin NOT NULL,
	`ensemble_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`name` varchar(200) NOT NULL,
	`source_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`data` json NOT NULL,
	`created_by` char(16) character set ascii collate ascii_bin,
	`created_at` datetime(3) NOT NULL,
	`deleted_at` datetime(3),
	CONSTRAINT `outside_structures_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `pair_matrices` (
	`id` char(16) character set ascii collate ascii_bin NOT NULL,
	`ensemble_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`input_sha` binary(32) NOT NULL,
	`recipe` json NOT NULL,
	`numbers` json NOT NULL,
	`job_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`created_at` datetime(3) NOT NULL,
	CONSTRAINT `pair_matrices_id` PRIMARY KEY(`id`),
	CONSTRAINT `pair_matrices_same` UNIQUE(`ensemble_id`,`input_sha`)
);
--> statement-breakpoint
CREATE TABLE `pair_matrix_blocks` (
	`matrix_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`position` int NOT NULL,
	`data` longblob NOT NULL,
	CONSTRAINT `pair_matrix_blocks_matrix_id_position_pk` PRIMARY KEY(`matrix_id`,`position`)
);
--> statement-breakpoint
CREATE TABLE `plans` (
	`id` char(16) character set ascii collate ascii_bin NOT NULL,
	`ensemble_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`name` varchar(120) NOT NULL,
	`plan` json NOT NULL,
	`version` int NOT NULL DEFAULT 1,
	`created_by` char(16) character set ascii collate ascii_bin,
	`created_at` datetime(3) NOT NULL,
	`changed_at` datetime(3) NOT NULL,
	CONSTRAINT `plans_id` PRIMARY KEY(`id`),
	CONSTRAINT `plans_name` UNIQUE(`ensemble_id`,`name`)
);
--> statement-breakpoint
CREATE TABLE `verifications` (
	`id` char(16) character set ascii collate ascii_bin NOT NULL,
	`edition_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`same` boolean NOT NULL,
	`files` json NOT NULL,
	`code_version` varchar(40) NOT NULL,
	`seconds` double NOT NULL,
	`created_by` char(16) character set ascii collate ascii_bin,
	`created_at` datetime(3) NOT NULL,
	CONSTRAINT `verifications_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
ALTER TABLE `columns` ADD `geometry_level` varchar(120);--> statement-breakpoint
ALTER TABLE `columns` ADD `solvent` varchar(120);--> statement-breakpoint
ALTER TABLE `columns` ADD `quantity` varchar(120);--> statement-breakpoint
ALTER TABLE `columns` ADD `atom` int;--> statement-breakpoint
ALTER TABLE `columns` ADD `definition` json;--> statement-breakpoint
ALTER TABLE `columns` ADD `kind_stated` boolean DEFAULT false NOT NULL;--> statement-breakpoint
ALTER TABLE `columns` ADD `created_by` char(16) character set ascii collate ascii_bin;--> statement-breakpoint
ALTER TABLE `ensemble_files` ADD `entry` varchar(255);--> statement-breakpoint
ALTER TABLE `ensembles` ADD `bond_table` json;--> statement-breakpoint
ALTER TABLE `frames` ADD `fields` json;--> statement-breakpoint
ALTER TABLE `mail_queue` ADD `html` text;--> statement-breakpoint
ALTER TABLE `mail_tokens` ADD `data` json;--> statement-breakpoint
ALTER TABLE `teams` ADD `link_days` int DEFAULT 90 NOT NULL;--> statement-breakpoint
ALTER TABLE `teams` ADD `deleted_at` datetime(3);--> statement-breakpoint
ALTER TABLE `users` ADD `deleted_at` datetime(3);--> statement-breakpoint
ALTER TABLE `batches` ADD CONSTRAINT `batches_ensemble_id_ensembles_id_fk` FOREIGN KEY (`ensemble_id`) REFERENCES `ensembles`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `invitations` ADD CONSTRAINT `invitations_team_id_teams_id_fk` FOREIGN KEY (`team_id`) REFERENCES `teams`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `links` ADD CONSTRAINT `links_edition_id_editions_id_fk` FOREIGN KEY (`edition_id`) REFERENCES `editions`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `outside_structures` ADD CONSTRAINT `outside_structures_ensemble_id_ensembles_id_fk` FOREIGN KEY (`ensemble_id`) REFERENCES `ensembles`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `outside_structures` ADD CONSTRAINT `outside_structures_source_id_sources_id_fk` FOREIGN KEY (`source_id`) REFERENCES `sources`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `pair_matrices` ADD CONSTRAINT `pair_matrices_ensemble_id_ensembles_id_fk` FOREIGN KEY (`ensemble_id`) REFERENCES `ensembles`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `pair_matrix_blocks` ADD CONSTRAINT `pair_matrix_blocks_matrix_id_pair_matrices_id_fk` FOREIGN KEY (`matrix_id`) REFERENCES `pair_matrices`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `plans` ADD CONSTRAINT `plans_ensemble_id_ensembles_id_fk` FOREIGN KEY (`ensemble_id`) REFERENCES `ensembles`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `verifications` ADD CONSTRAINT `verifications_edition_id_editions_id_fk` FOREIGN KEY (`edition_id`) REFERENCES `editions`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
CREATE INDEX `editions_team` ON `editions` (`team_id`,`created_at`);--> statement-breakpoint
CREATE INDEX `invitations_team` ON `invitations` (`team_id`);--> statement-breakpoint
CREATE INDEX `links_edition` ON `links` (`edition_id`);--> statement-breakpoint
CREATE INDEX `links_team` ON `links` (`team_id`);--> statement-breakpoint
CREATE INDEX `outside_structures_ensemble` ON `outside_structures` (`ensemble_id`,`created_at`);--> statement-breakpoint
CREATE INDEX `verifications_edition` ON `verifications` (`edition_id`,`created_at`);