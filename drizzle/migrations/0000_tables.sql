CREATE TABLE IF NOT EXISTS `group_prefixes` (
	`prefix` varchar(4) NOT NULL,
	`group_id` bigint NOT NULL,
	CONSTRAINT `group_prefixes_prefix` PRIMARY KEY(`prefix`)
) ENGINE=InnoDB DEFAULT CHARACTER SET utf8mb4 COLLATE utf8mb4_unicode_ci;
--> statement-breakpoint
CREATE TABLE IF NOT EXISTS `groups` (
	`id` bigint AUTO_INCREMENT NOT NULL,
	`slug` varchar(60) NOT NULL,
	`name` varchar(60) NOT NULL,
	`created_at` datetime(3) NOT NULL,
	CONSTRAINT `groups_id` PRIMARY KEY(`id`),
	CONSTRAINT `groups_slug` UNIQUE(`slug`)
) ENGINE=InnoDB DEFAULT CHARACTER SET utf8mb4 COLLATE utf8mb4_unicode_ci;
--> statement-breakpoint
CREATE TABLE IF NOT EXISTS `memberships` (
	`group_id` bigint NOT NULL,
	`person_id` bigint NOT NULL,
	`role` enum('reader','contributor','maintainer') NOT NULL,
	`since` datetime(3) NOT NULL,
	CONSTRAINT `memberships_group_id_person_id_pk` PRIMARY KEY(`group_id`,`person_id`)
) ENGINE=InnoDB DEFAULT CHARACTER SET utf8mb4 COLLATE utf8mb4_unicode_ci;
--> statement-breakpoint
CREATE TABLE IF NOT EXISTS `log` (
	`id` bigint AUTO_INCREMENT NOT NULL,
	`at` datetime(3) NOT NULL,
	`person_id` bigint,
	`act` varchar(60) NOT NULL,
	`target` varchar(120) NOT NULL,
	`before_value` json,
	`after_value` json,
	`request_id` varchar(64),
	`previous_hash` varchar(64) NOT NULL,
	`hash` varchar(64) NOT NULL,
	CONSTRAINT `log_id` PRIMARY KEY(`id`)
) ENGINE=InnoDB DEFAULT CHARACTER SET utf8mb4 COLLATE utf8mb4_unicode_ci;
--> statement-breakpoint
CREATE TABLE IF NOT EXISTS `settings` (
	`name` varchar(60) NOT NULL,
	`value` json NOT NULL,
	CONSTRAINT `settings_name` PRIMARY KEY(`name`)
) ENGINE=InnoDB DEFAULT CHARACTER SET utf8mb4 COLLATE utf8mb4_unicode_ci;
--> statement-breakpoint
CREATE TABLE IF NOT EXISTS `draft_writers` (
	`page_id` bigint NOT NULL,
	`generation` int NOT NULL,
	`person_id` bigint NOT NULL,
	`first` datetime(3) NOT NULL,
	`last` datetime(3) NOT NULL,
	CONSTRAINT `draft_writers_page_id_generation_person_id_pk` PRIMARY KEY(`page_id`,`generation`,`person_id`)
) ENGINE=InnoDB DEFAULT CHARACTER SET utf8mb4 COLLATE utf8mb4_unicode_ci;
--> statement-breakpoint
CREATE TABLE IF NOT EXISTS `page_codes` (
	`code` varchar(11) NOT NULL,
	`prefix` varchar(4) NOT NULL,
	`number` int NOT NULL,
	`given_at` datetime(3) NOT NULL,
	CONSTRAINT `page_codes_code` PRIMARY KEY(`code`)
) ENGINE=InnoDB DEFAULT CHARACTER SET utf8mb4 COLLATE utf8mb4_unicode_ci;
--> statement-breakpoint
CREATE TABLE IF NOT EXISTS `page_snapshots` (
	`id` bigint AUTO_INCREMENT NOT NULL,
	`page_id` bigint NOT NULL,
	`generation` int NOT NULL,
	`upto_seq` bigint NOT NULL,
	`data` longblob NOT NULL,
	`at` datetime(3) NOT NULL,
	CONSTRAINT `page_snapshots_id` PRIMARY KEY(`id`)
) ENGINE=InnoDB DEFAULT CHARACTER SET utf8mb4 COLLATE utf8mb4_unicode_ci;
--> statement-breakpoint
CREATE TABLE IF NOT EXISTS `page_updates` (
	`seq` bigint AUTO_INCREMENT NOT NULL,
	`page_id` bigint NOT NULL,
	`generation` int NOT NULL,
	`owner_epoch` int NOT NULL,
	`person_id` bigint,
	`data` longblob NOT NULL,
	`at` datetime(3) NOT NULL,
	CONSTRAINT `page_updates_seq` PRIMARY KEY(`seq`)
) ENGINE=InnoDB DEFAULT CHARACTER SET utf8mb4 COLLATE utf8mb4_unicode_ci;
--> statement-breakpoint
CREATE TABLE IF NOT EXISTS `pages` (
	`id` bigint AUTO_INCREMENT NOT NULL,
	`code` varchar(11) NOT NULL,
	`group_id` bigint NOT NULL,
	`title` varchar(200) NOT NULL,
	`summary` varchar(1000) NOT NULL DEFAULT '',
	`field` varchar(80) NOT NULL DEFAULT '',
	`access` enum('group','signed-in','open') NOT NULL DEFAULT 'group',
	`in_force_id` bigint,
	`in_review_id` bigint,
	`ever_public` int NOT NULL DEFAULT 0,
	`generation` int NOT NULL DEFAULT 1,
	`owner_epoch` int NOT NULL DEFAULT 0,
	`draft_card_id` bigint,
	`draft_summary` json,
	`draft_digest` varchar(80),
	`draft_changed_at` datetime(3) NOT NULL,
	`draft_card_at` datetime(3),
	`draft_words` text NOT NULL DEFAULT (''),
	`public_words` text NOT NULL DEFAULT (''),
	`version` int NOT NULL DEFAULT 1,
	`created_at` datetime(3) NOT NULL,
	`changed_at` datetime(3) NOT NULL,
	`removed_at` datetime(3),
	CONSTRAINT `pages_id` PRIMARY KEY(`id`),
	CONSTRAINT `pages_code` UNIQUE(`code`)
) ENGINE=InnoDB DEFAULT CHARACTER SET utf8mb4 COLLATE utf8mb4_unicode_ci;
--> statement-breakpoint
CREATE TABLE IF NOT EXISTS `idempotency_keys` (
	`person_id` bigint NOT NULL,
	`idempotency_key` varchar(100) NOT NULL,
	`request_hash` varchar(64) NOT NULL,
	`status` smallint,
	`answer` json,
	`created_at` datetime(3) NOT NULL,
	CONSTRAINT `idempotency_keys_person_id_idempotency_key_pk` PRIMARY KEY(`person_id`,`idempotency_key`)
) ENGINE=InnoDB DEFAULT CHARACTER SET utf8mb4 COLLATE utf8mb4_unicode_ci;
--> statement-breakpoint
CREATE TABLE IF NOT EXISTS `invitations` (
	`id` bigint AUTO_INCREMENT NOT NULL,
	`group_id` bigint NOT NULL,
	`link_id` bigint NOT NULL,
	`email` varchar(254) NOT NULL,
	`name` varchar(80),
	`role` enum('reader','contributor','maintainer') NOT NULL,
	`invited_by` bigint NOT NULL,
	`created_at` datetime(3) NOT NULL,
	`revoked_at` datetime(3),
	CONSTRAINT `invitations_id` PRIMARY KEY(`id`)
) ENGINE=InnoDB DEFAULT CHARACTER SET utf8mb4 COLLATE utf8mb4_unicode_ci;
--> statement-breakpoint
CREATE TABLE IF NOT EXISTS `one_time_links` (
	`id` bigint AUTO_INCREMENT NOT NULL,
	`kind` enum('setup','invitation','password') NOT NULL,
	`token_hash` varchar(64) NOT NULL,
	`person_id` bigint,
	`created_at` datetime(3) NOT NULL,
	`expires_at` datetime(3) NOT NULL,
	`used_at` datetime(3),
	CONSTRAINT `one_time_links_id` PRIMARY KEY(`id`),
	CONSTRAINT `one_time_links_token` UNIQUE(`token_hash`)
) ENGINE=InnoDB DEFAULT CHARACTER SET utf8mb4 COLLATE utf8mb4_unicode_ci;
--> statement-breakpoint
CREATE TABLE IF NOT EXISTS `people` (
	`id` bigint AUTO_INCREMENT NOT NULL,
	`email` varchar(254) NOT NULL,
	`name` varchar(80) NOT NULL,
	`password_hash` varchar(255),
	`administrator` boolean NOT NULL DEFAULT false,
	`disabled` boolean NOT NULL DEFAULT false,
	`epoch` int NOT NULL DEFAULT 1,
	`created_at` datetime(3) NOT NULL,
	CONSTRAINT `people_id` PRIMARY KEY(`id`),
	CONSTRAINT `people_email` UNIQUE(`email`)
) ENGINE=InnoDB DEFAULT CHARACTER SET utf8mb4 COLLATE utf8mb4_unicode_ci;
--> statement-breakpoint
CREATE TABLE IF NOT EXISTS `sessions` (
	`session_id` varchar(128) NOT NULL,
	`expires` int unsigned NOT NULL,
	`data` text,
	CONSTRAINT `sessions_session_id` PRIMARY KEY(`session_id`)
) ENGINE=InnoDB DEFAULT CHARACTER SET utf8mb4 COLLATE utf8mb4_unicode_ci;
--> statement-breakpoint
CREATE TABLE IF NOT EXISTS `sign_ins` (
	`id` bigint AUTO_INCREMENT NOT NULL,
	`person_id` bigint NOT NULL,
	`session_hash` varchar(64) NOT NULL,
	`at` datetime(3) NOT NULL,
	`last_seen` datetime(3) NOT NULL,
	`ended_at` datetime(3),
	`user_agent` varchar(200) NOT NULL DEFAULT '',
	CONSTRAINT `sign_ins_id` PRIMARY KEY(`id`)
) ENGINE=InnoDB DEFAULT CHARACTER SET utf8mb4 COLLATE utf8mb4_unicode_ci;
--> statement-breakpoint
CREATE TABLE IF NOT EXISTS `cards` (
	`id` bigint AUTO_INCREMENT NOT NULL,
	`fingerprint` varchar(80) NOT NULL,
	`engine` varchar(20) NOT NULL,
	`parts` varchar(60) NOT NULL,
	`card` json NOT NULL,
	`at` datetime(3) NOT NULL,
	CONSTRAINT `cards_id` PRIMARY KEY(`id`),
	CONSTRAINT `cards_key` UNIQUE(`fingerprint`,`engine`,`parts`)
) ENGINE=InnoDB DEFAULT CHARACTER SET utf8mb4 COLLATE utf8mb4_unicode_ci;
--> statement-breakpoint
CREATE TABLE IF NOT EXISTS `remarks` (
	`id` bigint AUTO_INCREMENT NOT NULL,
	`revision_id` bigint NOT NULL,
	`author_id` bigint NOT NULL,
	`line` int,
	`symbol` varchar(64),
	`text` varchar(4000) NOT NULL,
	`at` datetime(3) NOT NULL,
	CONSTRAINT `remarks_id` PRIMARY KEY(`id`)
) ENGINE=InnoDB DEFAULT CHARACTER SET utf8mb4 COLLATE utf8mb4_unicode_ci;
--> statement-breakpoint
CREATE TABLE IF NOT EXISTS `revisions` (
	`id` bigint AUTO_INCREMENT NOT NULL,
	`page_id` bigint NOT NULL,
	`number` int NOT NULL,
	`major` int NOT NULL,
	`minor` int NOT NULL,
	`patch` int NOT NULL,
	`state` enum('in-review','returned','in-force','superseded','withdrawn') NOT NULL,
	`summary` varchar(500) NOT NULL,
	`document` json NOT NULL,
	`digest` varchar(80) NOT NULL,
	`fingerprint` varchar(80) NOT NULL,
	`engine` varchar(20) NOT NULL,
	`card_id` bigint NOT NULL,
	`card_summary` json NOT NULL,
	`base_id` bigint,
	`generation` int NOT NULL,
	`sent_by` bigint NOT NULL,
	`sent_at` datetime(3) NOT NULL,
	`settled_at` datetime(3),
	`reason` varchar(1000),
	CONSTRAINT `revisions_id` PRIMARY KEY(`id`),
	CONSTRAINT `revisions_number` UNIQUE(`page_id`,`number`),
	CONSTRAINT `revisions_mark` UNIQUE(`page_id`,`major`,`minor`,`patch`)
) ENGINE=InnoDB DEFAULT CHARACTER SET utf8mb4 COLLATE utf8mb4_unicode_ci;
--> statement-breakpoint
CREATE TABLE IF NOT EXISTS `signatures` (
	`id` bigint AUTO_INCREMENT NOT NULL,
	`revision_id` bigint NOT NULL,
	`person_id` bigint NOT NULL,
	`meaning` enum('written','checked','approved','withdrawn') NOT NULL,
	`digest` varchar(80) NOT NULL,
	`at` datetime(3) NOT NULL,
	CONSTRAINT `signatures_id` PRIMARY KEY(`id`),
	CONSTRAINT `signatures_once` UNIQUE(`revision_id`,`person_id`,`meaning`)
) ENGINE=InnoDB DEFAULT CHARACTER SET utf8mb4 COLLATE utf8mb4_unicode_ci;
--> statement-breakpoint
CREATE TABLE IF NOT EXISTS `source_links` (
	`id` bigint AUTO_INCREMENT NOT NULL,
	`page_id` bigint NOT NULL,
	`source_id` bigint NOT NULL,
	`target` enum('page','parameter','line') NOT NULL,
	`symbol` varchar(64),
	`line` int,
	`anchor` varchar(200),
	`label` enum('page','equation','table','figure','section','chapter','paragraph','line','note','part','volume'),
	`locator` varchar(60),
	`quoted` varchar(200),
	`added_by` bigint NOT NULL,
	`added_at` datetime(3) NOT NULL,
	`removed_at` datetime(3),
	CONSTRAINT `source_links_id` PRIMARY KEY(`id`)
) ENGINE=InnoDB DEFAULT CHARACTER SET utf8mb4 COLLATE utf8mb4_unicode_ci;
--> statement-breakpoint
CREATE TABLE IF NOT EXISTS `sources` (
	`id` bigint AUTO_INCREMENT NOT NULL,
	`group_id` bigint NOT NULL,
	`citation_key` varchar(120) NOT NULL,
	`csl` json NOT NULL,
	`doi` varchar(200),
	`words` varchar(1000) NOT NULL DEFAULT '',
	`added_by` bigint NOT NULL,
	`added_at` datetime(3) NOT NULL,
	CONSTRAINT `sources_id` PRIMARY KEY(`id`),
	CONSTRAINT `sources_doi` UNIQUE(`group_id`,`doi`),
	CONSTRAINT `sources_key` UNIQUE(`group_id`,`citation_key`)
) ENGINE=InnoDB DEFAULT CHARACTER SET utf8mb4 COLLATE utf8mb4_unicode_ci;
--> statement-breakpoint
ALTER TABLE `group_prefixes` ADD CONSTRAINT `group_prefixes_group_id_groups_id_fk` FOREIGN KEY IF NOT EXISTS (`group_id`) REFERENCES `groups`(`id`) ON DELETE restrict ON UPDATE restrict;--> statement-breakpoint
ALTER TABLE `memberships` ADD CONSTRAINT `memberships_group_id_groups_id_fk` FOREIGN KEY IF NOT EXISTS (`group_id`) REFERENCES `groups`(`id`) ON DELETE restrict ON UPDATE restrict;--> statement-breakpoint
ALTER TABLE `memberships` ADD CONSTRAINT `memberships_person_id_people_id_fk` FOREIGN KEY IF NOT EXISTS (`person_id`) REFERENCES `people`(`id`) ON DELETE restrict ON UPDATE restrict;--> statement-breakpoint
ALTER TABLE `log` ADD CONSTRAINT `log_person_id_people_id_fk` FOREIGN KEY IF NOT EXISTS (`person_id`) REFERENCES `people`(`id`) ON DELETE restrict ON UPDATE restrict;--> statement-breakpoint
ALTER TABLE `draft_writers` ADD CONSTRAINT `draft_writers_page_id_pages_id_fk` FOREIGN KEY IF NOT EXISTS (`page_id`) REFERENCES `pages`(`id`) ON DELETE restrict ON UPDATE restrict;--> statement-breakpoint
ALTER TABLE `draft_writers` ADD CONSTRAINT `draft_writers_person_id_people_id_fk` FOREIGN KEY IF NOT EXISTS (`person_id`) REFERENCES `people`(`id`) ON DELETE restrict ON UPDATE restrict;--> statement-breakpoint
ALTER TABLE `page_codes` ADD CONSTRAINT `page_codes_prefix_group_prefixes_prefix_fk` FOREIGN KEY IF NOT EXISTS (`prefix`) REFERENCES `group_prefixes`(`prefix`) ON DELETE restrict ON UPDATE restrict;--> statement-breakpoint
ALTER TABLE `page_snapshots` ADD CONSTRAINT `page_snapshots_page_id_pages_id_fk` FOREIGN KEY IF NOT EXISTS (`page_id`) REFERENCES `pages`(`id`) ON DELETE restrict ON UPDATE restrict;--> statement-breakpoint
ALTER TABLE `page_updates` ADD CONSTRAINT `page_updates_page_id_pages_id_fk` FOREIGN KEY IF NOT EXISTS (`page_id`) REFERENCES `pages`(`id`) ON DELETE restrict ON UPDATE restrict;--> statement-breakpoint
ALTER TABLE `page_updates` ADD CONSTRAINT `page_updates_person_id_people_id_fk` FOREIGN KEY IF NOT EXISTS (`person_id`) REFERENCES `people`(`id`) ON DELETE restrict ON UPDATE restrict;--> statement-breakpoint
ALTER TABLE `pages` ADD CONSTRAINT `pages_group_id_groups_id_fk` FOREIGN KEY IF NOT EXISTS (`group_id`) REFERENCES `groups`(`id`) ON DELETE restrict ON UPDATE restrict;--> statement-breakpoint
ALTER TABLE `pages` ADD CONSTRAINT `pages_in_force_id_revisions_id_fk` FOREIGN KEY IF NOT EXISTS (`in_force_id`) REFERENCES `revisions`(`id`) ON DELETE restrict ON UPDATE restrict;--> statement-breakpoint
ALTER TABLE `pages` ADD CONSTRAINT `pages_in_review_id_revisions_id_fk` FOREIGN KEY IF NOT EXISTS (`in_review_id`) REFERENCES `revisions`(`id`) ON DELETE restrict ON UPDATE restrict;--> statement-breakpoint
ALTER TABLE `pages` ADD CONSTRAINT `pages_draft_card_id_cards_id_fk` FOREIGN KEY IF NOT EXISTS (`draft_card_id`) REFERENCES `cards`(`id`) ON DELETE restrict ON UPDATE restrict;--> statement-breakpoint
ALTER TABLE `idempotency_keys` ADD CONSTRAINT `idempotency_keys_person_id_people_id_fk` FOREIGN KEY IF NOT EXISTS (`person_id`) REFERENCES `people`(`id`) ON DELETE restrict ON UPDATE restrict;--> statement-breakpoint
ALTER TABLE `invitations` ADD CONSTRAINT `invitations_group_id_groups_id_fk` FOREIGN KEY IF NOT EXISTS (`group_id`) REFERENCES `groups`(`id`) ON DELETE restrict ON UPDATE restrict;--> statement-breakpoint
ALTER TABLE `invitations` ADD CONSTRAINT `invitations_link_id_one_time_links_id_fk` FOREIGN KEY IF NOT EXISTS (`link_id`) REFERENCES `one_time_links`(`id`) ON DELETE restrict ON UPDATE restrict;--> statement-breakpoint
ALTER TABLE `invitations` ADD CONSTRAINT `invitations_invited_by_people_id_fk` FOREIGN KEY IF NOT EXISTS (`invited_by`) REFERENCES `people`(`id`) ON DELETE restrict ON UPDATE restrict;--> statement-breakpoint
ALTER TABLE `one_time_links` ADD CONSTRAINT `one_time_links_person_id_people_id_fk` FOREIGN KEY IF NOT EXISTS (`person_id`) REFERENCES `people`(`id`) ON DELETE restrict ON UPDATE restrict;--> statement-breakpoint
ALTER TABLE `sign_ins` ADD CONSTRAINT `sign_ins_person_id_people_id_fk` FOREIGN KEY IF NOT EXISTS (`person_id`) REFERENCES `people`(`id`) ON DELETE restrict ON UPDATE restrict;--> statement-breakpoint
ALTER TABLE `remarks` ADD CONSTRAINT `remarks_revision_id_revisions_id_fk` FOREIGN KEY IF NOT EXISTS (`revision_id`) REFERENCES `revisions`(`id`) ON DELETE restrict ON UPDATE restrict;--> statement-breakpoint
ALTER TABLE `remarks` ADD CONSTRAINT `remarks_author_id_people_id_fk` FOREIGN KEY IF NOT EXISTS (`author_id`) REFERENCES `people`(`id`) ON DELETE restrict ON UPDATE restrict;--> statement-breakpoint
ALTER TABLE `revisions` ADD CONSTRAINT `revisions_page_id_pages_id_fk` FOREIGN KEY IF NOT EXISTS (`page_id`) REFERENCES `pages`(`id`) ON DELETE restrict ON UPDATE restrict;--> statement-breakpoint
ALTER TABLE `revisions` ADD CONSTRAINT `revisions_card_id_cards_id_fk` FOREIGN KEY IF NOT EXISTS (`card_id`) REFERENCES `cards`(`id`) ON DELETE restrict ON UPDATE restrict;--> statement-breakpoint
ALTER TABLE `revisions` ADD CONSTRAINT `revisions_base_id_revisions_id_fk` FOREIGN KEY IF NOT EXISTS (`base_id`) REFERENCES `revisions`(`id`) ON DELETE restrict ON UPDATE restrict;--> statement-breakpoint
ALTER TABLE `revisions` ADD CONSTRAINT `revisions_sent_by_people_id_fk` FOREIGN KEY IF NOT EXISTS (`sent_by`) REFERENCES `people`(`id`) ON DELETE restrict ON UPDATE restrict;--> statement-breakpoint
ALTER TABLE `signatures` ADD CONSTRAINT `signatures_revision_id_revisions_id_fk` FOREIGN KEY IF NOT EXISTS (`revision_id`) REFERENCES `revisions`(`id`) ON DELETE restrict ON UPDATE restrict;--> statement-breakpoint
ALTER TABLE `signatures` ADD CONSTRAINT `signatures_person_id_people_id_fk` FOREIGN KEY IF NOT EXISTS (`person_id`) REFERENCES `people`(`id`) ON DELETE restrict ON UPDATE restrict;--> statement-breakpoint
ALTER TABLE `source_links` ADD CONSTRAINT `source_links_page_id_pages_id_fk` FOREIGN KEY IF NOT EXISTS (`page_id`) REFERENCES `pages`(`id`) ON DELETE restrict ON UPDATE restrict;--> statement-breakpoint
ALTER TABLE `source_links` ADD CONSTRAINT `source_links_source_id_sources_id_fk` FOREIGN KEY IF NOT EXISTS (`source_id`) REFERENCES `sources`(`id`) ON DELETE restrict ON UPDATE restrict;--> statement-breakpoint
ALTER TABLE `source_links` ADD CONSTRAINT `source_links_added_by_people_id_fk` FOREIGN KEY IF NOT EXISTS (`added_by`) REFERENCES `people`(`id`) ON DELETE restrict ON UPDATE restrict;--> statement-breakpoint
ALTER TABLE `sources` ADD CONSTRAINT `sources_group_id_groups_id_fk` FOREIGN KEY IF NOT EXISTS (`group_id`) REFERENCES `groups`(`id`) ON DELETE restrict ON UPDATE restrict;--> statement-breakpoint
ALTER TABLE `sources` ADD CONSTRAINT `sources_added_by_people_id_fk` FOREIGN KEY IF NOT EXISTS (`added_by`) REFERENCES `people`(`id`) ON DELETE restrict ON UPDATE restrict;--> statement-breakpoint
CREATE INDEX IF NOT EXISTS `log_target` ON `log` (`target`,`id`);--> statement-breakpoint
CREATE INDEX IF NOT EXISTS `page_snapshots_page` ON `page_snapshots` (`page_id`,`generation`,`upto_seq`);--> statement-breakpoint
CREATE INDEX IF NOT EXISTS `page_updates_page` ON `page_updates` (`page_id`,`generation`,`seq`);--> statement-breakpoint
CREATE INDEX IF NOT EXISTS `pages_group` ON `pages` (`group_id`,`changed_at`);--> statement-breakpoint
CREATE INDEX IF NOT EXISTS `invitations_group` ON `invitations` (`group_id`);--> statement-breakpoint
CREATE INDEX IF NOT EXISTS `sessions_expires` ON `sessions` (`expires`);--> statement-breakpoint
CREATE INDEX IF NOT EXISTS `sign_ins_person` ON `sign_ins` (`person_id`,`at`);--> statement-breakpoint
CREATE INDEX IF NOT EXISTS `remarks_revision` ON `remarks` (`revision_id`);--> statement-breakpoint
CREATE INDEX IF NOT EXISTS `revisions_state` ON `revisions` (`state`,`sent_at`);--> statement-breakpoint
CREATE INDEX IF NOT EXISTS `source_links_page` ON `source_links` (`page_id`);