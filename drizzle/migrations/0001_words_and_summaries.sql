ALTER TABLE `pages` ADD `draft_summary` json;--> statement-breakpoint
ALTER TABLE `pages` ADD `draft_digest` varchar(80);--> statement-breakpoint
ALTER TABLE `pages` ADD `draft_card_at` datetime(3);--> statement-breakpoint
ALTER TABLE `pages` ADD `draft_words` text DEFAULT ('') NOT NULL;--> statement-breakpoint
ALTER TABLE `pages` ADD `public_words` text DEFAULT ('') NOT NULL;--> statement-breakpoint
ALTER TABLE `revisions` ADD `card_summary` json NOT NULL;--> statement-breakpoint
ALTER TABLE `cards` DROP COLUMN `summary`;