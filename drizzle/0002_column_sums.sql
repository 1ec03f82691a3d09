ALTER TABLE `columns` ADD `data_sha` binary(32) NOT NULL;--> statement-breakpoint
ALTER TABLE `sifts` ADD `summary` json;