CREATE TABLE `groups` (
	`id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`name` varchar(120) NOT NULL,
	`defaults` json NOT NULL,
	`version` int NOT NULL DEFAULT 1,
	`created_at` datetime(3) NOT NULL DEFAULT CURRENT_TIMESTAMP(3),
	CONSTRAINT `groups_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `mail_tokens` (
	`id` varchar(64) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`kind` enum('invitation','reset') NOT NULL,
	`email` varchar(254) NOT NULL,
	`group_id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin,
	`role` enum('annotator','reviewer','lead','guest'),
	`study_ids` json,
	`user_id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin,
	`created_by` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin,
	`expires_at` datetime(3) NOT NULL,
	`used_at` datetime(3),
	`revoked` boolean NOT NULL DEFAULT false,
	`created_at` datetime(3) NOT NULL DEFAULT CURRENT_TIMESTAMP(3),
	CONSTRAINT `mail_tokens_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `memberships` (
	`group_id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`user_id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`role` enum('annotator','reviewer','lead','guest') NOT NULL,
	`created_at` datetime(3) NOT NULL DEFAULT CURRENT_TIMESTAMP(3),
	CONSTRAINT `memberships_group_id_user_id_pk` PRIMARY KEY(`group_id`,`user_id`)
);
--> statement-breakpoint
CREATE TABLE `rate_limits` (
	`key` varchar(200) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`window_start` datetime(3) NOT NULL,
	`hits` int NOT NULL,
	CONSTRAINT `rate_limits_key` PRIMARY KEY(`key`)
);
--> statement-breakpoint
CREATE TABLE `sessions` (
	`id` varchar(255) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`user_id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`expires_at` datetime NOT NULL,
	`created_at` datetime(3) NOT NULL DEFAULT CURRENT_TIMESTAMP(3),
	`user_agent` varchar(255) NOT NULL DEFAULT '',
	CONSTRAINT `sessions_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `users` (
	`id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`email` varchar(254) NOT NULL,
	`name` varchar(120) NOT NULL,
	`password_hash` varchar(255) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`created_at` datetime(3) NOT NULL DEFAULT CURRENT_TIMESTAMP(3),
	CONSTRAINT `users_id` PRIMARY KEY(`id`),
	CONSTRAINT `users_email_unique` UNIQUE(`email`)
);
--> statement-breakpoint
CREATE TABLE `audit_log` (
	`id` bigint AUTO_INCREMENT NOT NULL,
	`group_id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin,
	`actor_id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin,
	`actor_name` varchar(120) NOT NULL,
	`action` varchar(60) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`subject_kind` varchar(30) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`subject_id` varchar(64) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`details` json NOT NULL,
	`created_at` datetime(3) NOT NULL DEFAULT CURRENT_TIMESTAMP(3),
	CONSTRAINT `audit_log_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `jobs` (
	`id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`kind` enum('read-run','build-trees','suggest','mail') NOT NULL,
	`state` enum('queued','running','done','failed','cancelled') NOT NULL DEFAULT 'queued',
	`group_id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin,
	`study_id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin,
	`subject_id` varchar(64) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`input` json NOT NULL,
	`progress` json NOT NULL,
	`result` json,
	`error` json,
	`attempts` int NOT NULL DEFAULT 0,
	`max_attempts` int NOT NULL DEFAULT 3,
	`cancel_asked` int NOT NULL DEFAULT 0,
	`owner` varchar(64) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin,
	`heartbeat_at` datetime(3),
	`not_before` datetime(3),
	`created_by` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin,
	`created_at` datetime(3) NOT NULL DEFAULT CURRENT_TIMESTAMP(3),
	`started_at` datetime(3),
	`settled_at` datetime(3),
	CONSTRAINT `jobs_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `remarks` (
	`id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`tree_id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`thread_id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin,
	`anchor` enum('tree','spectrum','ion','loss') NOT NULL,
	`spectrum` int,
	`ion_id` bigint,
	`mz` double,
	`author_id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin,
	`body` text NOT NULL,
	`revision_number` int,
	`resolved_at` datetime(3),
	`resolved_by` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin,
	`created_at` datetime(3) NOT NULL DEFAULT CURRENT_TIMESTAMP(3),
	CONSTRAINT `remarks_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `review_requests` (
	`id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`revision_id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`reviewer_id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`verdict` enum('approve','ask-for-changes'),
	`reason` text,
	`decided_at` datetime(3),
	`created_at` datetime(3) NOT NULL DEFAULT CURRENT_TIMESTAMP(3),
	CONSTRAINT `review_requests_id` PRIMARY KEY(`id`),
	CONSTRAINT `review_requests_pair` UNIQUE(`revision_id`,`reviewer_id`)
);
--> statement-breakpoint
CREATE TABLE `revisions` (
	`id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`tree_id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`number` int NOT NULL,
	`tree_version` int NOT NULL,
	`content` longtext CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`hash` varchar(64) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`status` enum('in-review','changes-asked','approved','superseded','withdrawn') NOT NULL,
	`message` text NOT NULL,
	`created_by` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin,
	`created_at` datetime(3) NOT NULL DEFAULT CURRENT_TIMESTAMP(3),
	`decided_at` datetime(3),
	CONSTRAINT `revisions_id` PRIMARY KEY(`id`),
	CONSTRAINT `revisions_number` UNIQUE(`tree_id`,`number`)
);
--> statement-breakpoint
CREATE TABLE `share_links` (
	`id` varchar(64) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`study_id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`tree_id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin,
	`created_by` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin,
	`expires_at` datetime(3) NOT NULL,
	`revoked_at` datetime(3),
	`created_at` datetime(3) NOT NULL DEFAULT CURRENT_TIMESTAMP(3),
	CONSTRAINT `share_links_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `run_precursors` (
	`id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`run_id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`position` int NOT NULL,
	`mz` double NOT NULL,
	`charge` int,
	`isolation` json,
	`levels` json NOT NULL,
	`scan_indexes` json NOT NULL,
	`intensity` double,
	CONSTRAINT `run_precursors_id` PRIMARY KEY(`id`),
	CONSTRAINT `run_precursors_run` UNIQUE(`run_id`,`position`)
);
--> statement-breakpoint
CREATE TABLE `runs` (
	`id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`study_id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`file_name` varchar(200) NOT NULL,
	`storage_key` varchar(200) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`bytes` bigint NOT NULL,
	`sha1` varchar(40) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`sha256` varchar(64) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`state` enum('waiting','reading','ready','failed') NOT NULL DEFAULT 'waiting',
	`info` json,
	`warnings` json,
	`error` json,
	`uploaded_by` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin,
	`created_at` datetime(3) NOT NULL DEFAULT CURRENT_TIMESTAMP(3),
	`read_at` datetime(3),
	CONSTRAINT `runs_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `scans` (
	`id` bigint AUTO_INCREMENT NOT NULL,
	`run_id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`index` int NOT NULL,
	`native_id` varchar(500) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`level` int NOT NULL,
	`polarity` enum('positive','negative'),
	`time` double,
	`total_ion_current` double NOT NULL,
	`base_peak_mz` double,
	`base_peak_intensity` double,
	`centroided` boolean NOT NULL,
	`peak_count` int NOT NULL,
	`header` json NOT NULL,
	`peaks` mediumblob NOT NULL,
	CONSTRAINT `scans_id` PRIMARY KEY(`id`),
	CONSTRAINT `scans_run_index` UNIQUE(`run_id`,`index`)
);
--> statement-breakpoint
CREATE TABLE `studies` (
	`id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`group_id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`name` varchar(160) NOT NULL,
	`description` text NOT NULL,
	`version` int NOT NULL DEFAULT 1,
	`created_by` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin,
	`created_at` datetime(3) NOT NULL DEFAULT CURRENT_TIMESTAMP(3),
	`updated_at` datetime(3) NOT NULL,
	CONSTRAINT `studies_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `study_guests` (
	`study_id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`user_id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`created_at` datetime(3) NOT NULL DEFAULT CURRENT_TIMESTAMP(3),
	CONSTRAINT `study_guests_study_id_user_id_pk` PRIMARY KEY(`study_id`,`user_id`)
);
--> statement-breakpoint
CREATE TABLE `uploads` (
	`id` varchar(64) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`study_id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`user_id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`file_name` varchar(200) NOT NULL,
	`bytes` bigint NOT NULL,
	`state` enum('receiving','complete','cancelled') NOT NULL DEFAULT 'receiving',
	`run_id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin,
	`created_at` datetime(3) NOT NULL DEFAULT CURRENT_TIMESTAMP(3),
	CONSTRAINT `uploads_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `claim_history` (
	`id` bigint AUTO_INCREMENT NOT NULL,
	`ion_id` bigint NOT NULL,
	`actor_id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin,
	`action` enum('proposed','confirmed','rejected','opened','undone') NOT NULL,
	`before` json NOT NULL,
	`after` json NOT NULL,
	`reason` text,
	`created_at` datetime(3) NOT NULL DEFAULT CURRENT_TIMESTAMP(3),
	CONSTRAINT `claim_history_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
CREATE TABLE `ions` (
	`id` bigint AUTO_INCREMENT NOT NULL,
	`tree_id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`spectrum` int NOT NULL,
	`position` int NOT NULL,
	`mz` double NOT NULL,
	`intensity` double NOT NULL,
	`scan_count` int NOT NULL,
	`state` enum('open','proposed','confirmed','rejected') NOT NULL DEFAULT 'open',
	`formula` varchar(120) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin,
	`charge` int NOT NULL,
	`error_ppm` double,
	`dbe` double,
	`odd_electron` boolean,
	`from_mz` double,
	`from_formula` varchar(120) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin,
	`loss` varchar(120) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin,
	`loss_radical` boolean NOT NULL DEFAULT false,
	`link` enum('measured','inferred'),
	`is_precursor` boolean NOT NULL DEFAULT false,
	`flag` varchar(20),
	`score` double,
	`terms` json NOT NULL,
	`alternatives` json NOT NULL,
	`reason` text,
	`decided_by` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin,
	`decided_at` datetime(3),
	`version` int NOT NULL DEFAULT 1,
	CONSTRAINT `ions_id` PRIMARY KEY(`id`),
	CONSTRAINT `ions_position` UNIQUE(`tree_id`,`spectrum`,`position`)
);
--> statement-breakpoint
CREATE TABLE `tree_spectra` (
	`id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`tree_id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`index` int NOT NULL,
	`level` int NOT NULL,
	`path` json NOT NULL,
	`parent` int,
	`linked_by` enum('reference','precursor-list','filter-string','isolated-mz','none') NOT NULL,
	`isolation` json,
	`scan_ids` json NOT NULL,
	`activations` json NOT NULL,
	`energies` json NOT NULL,
	`energy_unit` varchar(4),
	`analyser` varchar(20) NOT NULL,
	`time_first` double,
	`time_last` double,
	CONSTRAINT `tree_spectra_id` PRIMARY KEY(`id`),
	CONSTRAINT `tree_spectra_index` UNIQUE(`tree_id`,`index`)
);
--> statement-breakpoint
CREATE TABLE `trees` (
	`id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`study_id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`run_id` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin NOT NULL,
	`name` varchar(160) NOT NULL,
	`precursor_mz` double NOT NULL,
	`charge` int,
	`polarity` enum('positive','negative') NOT NULL,
	`adduct` varchar(60) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin,
	`formula` varchar(120) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin,
	`formula_fixed` boolean NOT NULL DEFAULT false,
	`settings` json NOT NULL,
	`candidates` json NOT NULL,
	`notes` json NOT NULL,
	`ms1` mediumblob,
	`explained` double NOT NULL DEFAULT 0,
	`status` enum('draft','in-review','changes-asked','approved') NOT NULL DEFAULT 'draft',
	`confidence_level` varchar(4) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin,
	`version` int NOT NULL DEFAULT 1,
	`suggested_at` datetime(3),
	`created_by` varchar(36) CHARACTER SET utf8mb4 COLLATE utf8mb4_nopad_bin,
	`created_at` datetime(3) NOT NULL DEFAULT CURRENT_TIMESTAMP(3),
	`updated_at` datetime(3) NOT NULL,
	CONSTRAINT `trees_id` PRIMARY KEY(`id`)
);
--> statement-breakpoint
ALTER TABLE `mail_tokens` ADD CONSTRAINT `mail_tokens_group_id_groups_id_fk` FOREIGN KEY (`group_id`) REFERENCES `groups`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `mail_tokens` ADD CONSTRAINT `mail_tokens_user_id_users_id_fk` FOREIGN KEY (`user_id`) REFERENCES `users`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `mail_tokens` ADD CONSTRAINT `mail_tokens_created_by_users_id_fk` FOREIGN KEY (`created_by`) REFERENCES `users`(`id`) ON DELETE set null ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `memberships` ADD CONSTRAINT `memberships_group_id_groups_id_fk` FOREIGN KEY (`group_id`) REFERENCES `groups`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `memberships` ADD CONSTRAINT `memberships_user_id_users_id_fk` FOREIGN KEY (`user_id`) REFERENCES `users`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `sessions` ADD CONSTRAINT `sessions_user_id_users_id_fk` FOREIGN KEY (`user_id`) REFERENCES `users`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `jobs` ADD CONSTRAINT `jobs_group_id_groups_id_fk` FOREIGN KEY (`group_id`) REFERENCES `groups`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `jobs` ADD CONSTRAINT `jobs_study_id_studies_id_fk` FOREIGN KEY (`study_id`) REFERENCES `studies`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `jobs` ADD CONSTRAINT `jobs_created_by_users_id_fk` FOREIGN KEY (`created_by`) REFERENCES `users`(`id`) ON DELETE set null ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `remarks` ADD CONSTRAINT `remarks_tree_id_trees_id_fk` FOREIGN KEY (`tree_id`) REFERENCES `trees`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `remarks` ADD CONSTRAINT `remarks_author_id_users_id_fk` FOREIGN KEY (`author_id`) REFERENCES `users`(`id`) ON DELETE set null ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `remarks` ADD CONSTRAINT `remarks_resolved_by_users_id_fk` FOREIGN KEY (`resolved_by`) REFERENCES `users`(`id`) ON DELETE set null ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `review_requests` ADD CONSTRAINT `review_requests_revision_id_revisions_id_fk` FOREIGN KEY (`revision_id`) REFERENCES `revisions`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `review_requests` ADD CONSTRAINT `review_requests_reviewer_id_users_id_fk` FOREIGN KEY (`reviewer_id`) REFERENCES `users`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `revisions` ADD CONSTRAINT `revisions_tree_id_trees_id_fk` FOREIGN KEY (`tree_id`) REFERENCES `trees`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `revisions` ADD CONSTRAINT `revisions_created_by_users_id_fk` FOREIGN KEY (`created_by`) REFERENCES `users`(`id`) ON DELETE set null ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `share_links` ADD CONSTRAINT `share_links_study_id_studies_id_fk` FOREIGN KEY (`study_id`) REFERENCES `studies`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `share_links` ADD CONSTRAINT `share_links_tree_id_trees_id_fk` FOREIGN KEY (`tree_id`) REFERENCES `trees`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `share_links` ADD CONSTRAINT `share_links_created_by_users_id_fk` FOREIGN KEY (`created_by`) REFERENCES `users`(`id`) ON DELETE set null ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `run_precursors` ADD CONSTRAINT `run_precursors_run_id_runs_id_fk` FOREIGN KEY (`run_id`) REFERENCES `runs`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `runs` ADD CONSTRAINT `runs_study_id_studies_id_fk` FOREIGN KEY (`study_id`) REFERENCES `studies`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `runs` ADD CONSTRAINT `runs_uploaded_by_users_id_fk` FOREIGN KEY (`uploaded_by`) REFERENCES `users`(`id`) ON DELETE set null ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `scans` ADD CONSTRAINT `scans_run_id_runs_id_fk` FOREIGN KEY (`run_id`) REFERENCES `runs`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `studies` ADD CONSTRAINT `studies_group_id_groups_id_fk` FOREIGN KEY (`group_id`) REFERENCES `groups`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `studies` ADD CONSTRAINT `studies_created_by_users_id_fk` FOREIGN KEY (`created_by`) REFERENCES `users`(`id`) ON DELETE set null ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `study_guests` ADD CONSTRAINT `study_guests_study_id_studies_id_fk` FOREIGN KEY (`study_id`) REFERENCES `studies`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `study_guests` ADD CONSTRAINT `study_guests_user_id_users_id_fk` FOREIGN KEY (`user_id`) REFERENCES `users`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `uploads` ADD CONSTRAINT `uploads_study_id_studies_id_fk` FOREIGN KEY (`study_id`) REFERENCES `studies`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `uploads` ADD CONSTRAINT `uploads_user_id_users_id_fk` FOREIGN KEY (`user_id`) REFERENCES `users`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `claim_history` ADD CONSTRAINT `claim_history_ion_id_ions_id_fk` FOREIGN KEY (`ion_id`) REFERENCES `ions`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `claim_history` ADD CONSTRAINT `claim_history_actor_id_users_id_fk` FOREIGN KEY (`actor_id`) REFERENCES `users`(`id`) ON DELETE set null ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `ions` ADD CONSTRAINT `ions_tree_id_trees_id_fk` FOREIGN KEY (`tree_id`) REFERENCES `trees`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `ions` ADD CONSTRAINT `ions_decided_by_users_id_fk` FOREIGN KEY (`decided_by`) REFERENCES `users`(`id`) ON DELETE set null ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `tree_spectra` ADD CONSTRAINT `tree_spectra_tree_id_trees_id_fk` FOREIGN KEY (`tree_id`) REFERENCES `trees`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `trees` ADD CONSTRAINT `trees_study_id_studies_id_fk` FOREIGN KEY (`study_id`) REFERENCES `studies`(`id`) ON DELETE cascade ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `trees` ADD CONSTRAINT `trees_run_id_runs_id_fk` FOREIGN KEY (`run_id`) REFERENCES `runs`(`id`) ON DELETE restrict ON UPDATE no action;--> statement-breakpoint
ALTER TABLE `trees` ADD CONSTRAINT `trees_created_by_users_id_fk` FOREIGN KEY (`created_by`) REFERENCES `users`(`id`) ON DELETE set null ON UPDATE no action;--> statement-breakpoint
CREATE INDEX `mail_tokens_group` ON `mail_tokens` (`group_id`);--> statement-breakpoint
CREATE INDEX `memberships_user` ON `memberships` (`user_id`);--> statement-breakpoint
CREATE INDEX `sessions_user` ON `sessions` (`user_id`);--> statement-breakpoint
CREATE INDEX `audit_group` ON `audit_log` (`group_id`,`id`);--> statement-breakpoint
CREATE INDEX `audit_subject` ON `audit_log` (`subject_kind`,`subject_id`);--> statement-breakpoint
CREATE INDEX `jobs_queue` ON `jobs` (`state`,`created_at`);--> statement-breakpoint
CREATE INDEX `jobs_subject` ON `jobs` (`subject_id`);--> statement-breakpoint
CREATE INDEX `remarks_tree` ON `remarks` (`tree_id`,`resolved_at`);--> statement-breakpoint
CREATE INDEX `review_requests_user` ON `review_requests` (`reviewer_id`);--> statement-breakpoint
CREATE INDEX `runs_study` ON `runs` (`study_id`);--> statement-breakpoint
CREATE INDEX `runs_hash` ON `runs` (`study_id`,`sha256`);--> statement-breakpoint
CREATE INDEX `scans_run_level` ON `scans` (`run_id`,`level`);--> statement-breakpoint
CREATE INDEX `studies_group` ON `studies` (`group_id`,`updated_at`);--> statement-breakpoint
CREATE INDEX `uploads_study` ON `uploads` (`study_id`);--> statement-breakpoint
CREATE INDEX `claim_history_ion` ON `claim_history` (`ion_id`);--> statement-breakpoint
CREATE INDEX `trees_study` ON `trees` (`study_id`,`updated_at`);--> statement-breakpoint
CREATE INDEX `trees_run` ON `trees` (`run_id`);