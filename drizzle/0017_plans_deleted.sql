ALTER TABLE `plans` ADD `deleted_at` datetime(3);--> statement-breakpoint
CREATE INDEX `plans_ensemble` ON `plans` (`ensemble_id`,`name`);--> statement-breakpoint
DROP INDEX `plans_name` ON `plans`;
