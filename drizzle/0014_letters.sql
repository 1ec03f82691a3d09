ALTER TABLE `users` ADD `confirmed_at` datetime(3);--> statement-breakpoint
ALTER TABLE `users` ADD `job_letters` boolean DEFAULT true NOT NULL;--> statement-breakpoint
ALTER TABLE `users` ADD `link_letters` boolean DEFAULT true NOT NULL;--> statement-breakpoint
ALTER TABLE `users` ADD `digest` boolean DEFAULT false NOT NULL;--> statement-breakpoint
ALTER TABLE `users` ADD `digest_at` datetime(3);--> statement-breakpoint
UPDATE `users` SET `confirmed_at` = `created_at` WHERE `demo` OR EXISTS (SELECT 1 FROM `invitations` WHERE `invitations`.`email` = `users`.`email` AND `invitations`.`used_at` IS NOT NULL) OR EXISTS (SELECT 1 FROM `mail_tokens` WHERE `mail_tokens`.`user_id` = `users`.`id` AND `mail_tokens`.`used_at` IS NOT NULL);
