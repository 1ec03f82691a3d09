ALTER TABLE `ensembles` MODIFY COLUMN `formula` varchar(1000) NOT NULL;--> statement-breakpoint
ALTER TABLE `sifts` ADD `geometry_sha` binary(32);