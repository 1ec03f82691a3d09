CREATE TABLE `removed_columns` (
	`id` char(16) character set ascii collate ascii_bin NOT NULL,
	`ensemble_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`name` varchar(120) NOT NULL,
	`facts` json NOT NULL,
	`source_id` char(16) character set ascii collate ascii_bin,
	`data` longblob NOT NULL,
	`removed_by` char(16) character set ascii collate ascii_bin,
	`removed_at` datetime(3) NOT NULL,
	CONSTRAINT `removed_columns_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
ALTER TABLE `columns` ADD `source_id` char(16) character set ascii collate ascii_bin;--> statement-breakpoint
ALTER TABLE `removed_columns` ADD CONSTRAINT `removed_columns_ensemble_id_ensembles_id_fk` FOREIGN KEY (`ensemble_id`) REFERENCES `ensembles`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `removed_columns` ADD CONSTRAINT `removed_columns_source_id_sources_id_fk` FOREIGN KEY (`source_id`) REFERENCES `sources`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
CREATE INDEX `removed_columns_ensemble` ON `removed_columns` (`ensemble_id`,`removed_at`);--> statement-breakpoint
ALTER TABLE `columns` ADD CONSTRAINT `columns_source_id_sources_id_fk` FOREIGN KEY (`source_id`) REFERENCES `sources`(`id`) ON DELETE no action ON UPDATE no action;--> statement-breakpoint
CREATE INDEX `columns_source` ON `columns` (`source_id`);