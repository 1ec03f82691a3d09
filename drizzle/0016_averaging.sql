CREATE TABLE `averaging` (
	`ensemble_id` char(16) character set ascii collate ascii_bin NOT NULL,
	`data` json NOT NULL,
	`version` int NOT NULL DEFAULT 1,
	`changed_at` datetime(3) NOT NULL,
	CONSTRAINT `averaging_ensemble_id` PRIMARY KEY(`ensemble_id`)
);
--> statement-breakpoint
ALTER TABLE `averaging` ADD CONSTRAINT `averaging_ensemble_id_ensembles_id_fk` FOREIGN KEY (`ensemble_id`) REFERENCES `ensembles`(`id`) ON DELETE cascade ON UPDATE no action;