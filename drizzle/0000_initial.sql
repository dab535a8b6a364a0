CREATE TABLE `account` (
	`id` text PRIMARY KEY NOT NULL,
	`account_id` text NOT NULL,
	`provider_id` text NOT NULL,
	`user_id` text NOT NULL,
	`access_token` text,
	`refresh_token` text,
	`id_token` text,
	`access_token_expires_at` integer,
	`refresh_token_expires_at` integer,
	`scope` text,
	`password` text,
	`created_at` integer NOT NULL,
	`updated_at` integer NOT NULL,
	FOREIGN KEY (`user_id`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE cascade
);
--> statement-breakpoint
CREATE INDEX `account_user` ON `account` (`user_id`);--> statement-breakpoint
CREATE TABLE `session` (
	`id` text PRIMARY KEY NOT NULL,
	`expires_at` integer NOT NULL,
	`token` text NOT NULL,
	`created_at` integer NOT NULL,
	`updated_at` integer NOT NULL,
	`ip_address` text,
	`user_agent` text,
	`user_id` text NOT NULL,
	`fresh_until` integer NOT NULL,
	FOREIGN KEY (`user_id`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE cascade
);
--> statement-breakpoint
CREATE UNIQUE INDEX `session_token_unique` ON `session` (`token`);--> statement-breakpoint
CREATE INDEX `session_user` ON `session` (`user_id`);--> statement-breakpoint
CREATE TABLE `two_factor` (
	`id` text PRIMARY KEY NOT NULL,
	`secret` text NOT NULL,
	`backup_codes` text NOT NULL,
	`user_id` text NOT NULL,
	`verified` integer DEFAULT true,
	`failed_verification_count` integer DEFAULT 0,
	`locked_until` integer,
	FOREIGN KEY (`user_id`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE cascade
);
--> statement-breakpoint
CREATE INDEX `two_factor_user` ON `two_factor` (`user_id`);--> statement-breakpoint
CREATE INDEX `two_factor_secret` ON `two_factor` (`secret`);--> statement-breakpoint
CREATE TABLE `user` (
	`id` text PRIMARY KEY NOT NULL,
	`name` text NOT NULL,
	`email` text NOT NULL,
	`email_verified` integer DEFAULT false NOT NULL,
	`image` text,
	`created_at` integer NOT NULL,
	`updated_at` integer NOT NULL,
	`two_factor_enabled` integer DEFAULT false,
	`is_admin` integer DEFAULT false NOT NULL,
	`time_zone` text DEFAULT 'Europe/Berlin' NOT NULL,
	`unit_set` text DEFAULT 'metric' NOT NULL
);
--> statement-breakpoint
CREATE UNIQUE INDEX `user_email_unique` ON `user` (`email`);--> statement-breakpoint
CREATE TABLE `verification` (
	`id` text PRIMARY KEY NOT NULL,
	`identifier` text NOT NULL,
	`value` text NOT NULL,
	`expires_at` integer NOT NULL,
	`created_at` integer NOT NULL,
	`updated_at` integer NOT NULL
);
--> statement-breakpoint
CREATE INDEX `verification_identifier` ON `verification` (`identifier`);--> statement-breakpoint
CREATE TABLE `approval` (
	`id` text PRIMARY KEY NOT NULL,
	`kind` text NOT NULL,
	`subject_type` text NOT NULL,
	`subject_id` text NOT NULL,
	`company_id` text NOT NULL,
	`requested_by` text NOT NULL,
	`requested_at` integer NOT NULL,
	`state` text DEFAULT 'asked' NOT NULL,
	`decided_by` text,
	`decided_at` integer,
	`reason` text DEFAULT '' NOT NULL,
	`payload` text NOT NULL,
	`version` integer DEFAULT 1 NOT NULL,
	FOREIGN KEY (`company_id`) REFERENCES `company`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`requested_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`decided_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE INDEX `approval_subject` ON `approval` (`subject_type`,`subject_id`);--> statement-breakpoint
CREATE INDEX `approval_company` ON `approval` (`company_id`,`state`);--> statement-breakpoint
CREATE TABLE `bid` (
	`id` text PRIMARY KEY NOT NULL,
	`request_id` text NOT NULL,
	`company_id` text NOT NULL,
	`number` integer NOT NULL,
	`state` text DEFAULT 'draft' NOT NULL,
	`specification_id` text NOT NULL,
	`currency` text NOT NULL,
	`body` text NOT NULL,
	`net_amount` integer NOT NULL,
	`tax_amount` integer NOT NULL,
	`freight_amount` integer NOT NULL,
	`total_amount` integer NOT NULL,
	`lead_time_working_days` integer NOT NULL,
	`valid_until` text NOT NULL,
	`submitted_at` integer,
	`submitted_by` text,
	`created_by` text NOT NULL,
	`created_at` integer NOT NULL,
	`command_id` text NOT NULL,
	`version` integer DEFAULT 1 NOT NULL,
	FOREIGN KEY (`request_id`) REFERENCES `request`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`company_id`) REFERENCES `company`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`specification_id`) REFERENCES `specification`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`submitted_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`created_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `bid_command_id_unique` ON `bid` (`command_id`);--> statement-breakpoint
CREATE UNIQUE INDEX `bid_request_company` ON `bid` (`request_id`,`company_id`);--> statement-breakpoint
CREATE INDEX `bid_company` ON `bid` (`company_id`,`state`);--> statement-breakpoint
CREATE INDEX `bid_validity` ON `bid` (`state`,`valid_until`);--> statement-breakpoint
CREATE TABLE `bid_exception` (
	`id` text PRIMARY KEY NOT NULL,
	`bid_id` text NOT NULL,
	`subject` text NOT NULL,
	`text` text NOT NULL,
	`position` integer NOT NULL,
	`state` text DEFAULT 'open' NOT NULL,
	`decided_by` text,
	`decided_at` integer,
	`reason` text DEFAULT '' NOT NULL,
	`refusal_confirmed` integer DEFAULT false NOT NULL,
	`version` integer DEFAULT 1 NOT NULL,
	FOREIGN KEY (`bid_id`) REFERENCES `bid`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`decided_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE INDEX `bid_exception_bid` ON `bid_exception` (`bid_id`);--> statement-breakpoint
CREATE TABLE `bid_file` (
	`id` text PRIMARY KEY NOT NULL,
	`bid_id` text NOT NULL,
	`file_id` text NOT NULL,
	FOREIGN KEY (`bid_id`) REFERENCES `bid`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`file_id`) REFERENCES `file`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `bid_file_once` ON `bid_file` (`bid_id`,`file_id`);--> statement-breakpoint
CREATE TABLE `requirement_check` (
	`id` text PRIMARY KEY NOT NULL,
	`company_id` text,
	`request_id` text,
	`request_version` integer,
	`requirement_hash` text NOT NULL,
	`requirement` text NOT NULL,
	`method_version` text NOT NULL,
	`setting` text NOT NULL,
	`state` text NOT NULL,
	`blockers` integer DEFAULT 0 NOT NULL,
	`cautions` integer DEFAULT 0 NOT NULL,
	`notes` integer DEFAULT 0 NOT NULL,
	`created_at` integer NOT NULL,
	`created_by` text,
	FOREIGN KEY (`company_id`) REFERENCES `company`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`created_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE INDEX `check_request` ON `requirement_check` (`request_id`,`request_version`);--> statement-breakpoint
CREATE INDEX `check_key` ON `requirement_check` (`requirement_hash`,`setting`,`method_version`);--> statement-breakpoint
CREATE TABLE `check_acknowledgement` (
	`id` text PRIMARY KEY NOT NULL,
	`check_id` text NOT NULL,
	`code` text NOT NULL,
	`subject` text NOT NULL,
	`kind` text NOT NULL,
	`name` text NOT NULL,
	`reason` text DEFAULT '' NOT NULL,
	`user_id` text NOT NULL,
	`at` integer NOT NULL,
	FOREIGN KEY (`check_id`) REFERENCES `requirement_check`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`user_id`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `check_acknowledgement_finding` ON `check_acknowledgement` (`check_id`,`code`,`subject`);--> statement-breakpoint
CREATE TABLE `check_result` (
	`check_id` text PRIMARY KEY NOT NULL,
	`body` text NOT NULL,
	FOREIGN KEY (`check_id`) REFERENCES `requirement_check`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE TABLE `heating_run` (
	`id` text PRIMARY KEY NOT NULL,
	`job_id` text NOT NULL,
	`user_id` text,
	`request` text NOT NULL,
	`method_version` text NOT NULL,
	`result` text,
	`problem` text,
	`created_at` integer NOT NULL,
	`expires_at` integer NOT NULL,
	FOREIGN KEY (`user_id`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE INDEX `heating_run_expires` ON `heating_run` (`expires_at`);--> statement-breakpoint
CREATE TABLE `company` (
	`id` text PRIMARY KEY NOT NULL,
	`kind` text NOT NULL,
	`name` text NOT NULL,
	`currency` text DEFAULT 'EUR' NOT NULL,
	`time_zone` text DEFAULT 'Europe/Berlin' NOT NULL,
	`tax_number` text DEFAULT '' NOT NULL,
	`website` text DEFAULT '' NOT NULL,
	`about` text DEFAULT '' NOT NULL,
	`approval_limit` integer,
	`verified_until` integer,
	`created_at` integer NOT NULL,
	`created_by` text NOT NULL,
	`command_id` text NOT NULL,
	`version` integer DEFAULT 1 NOT NULL,
	FOREIGN KEY (`created_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `company_name_unique` ON `company` (`name`);--> statement-breakpoint
CREATE UNIQUE INDEX `company_command_id_unique` ON `company` (`command_id`);--> statement-breakpoint
CREATE TABLE `company_address` (
	`id` text PRIMARY KEY NOT NULL,
	`company_id` text NOT NULL,
	`purpose` text NOT NULL,
	`address` text NOT NULL,
	`archived_at` integer,
	`version` integer DEFAULT 1 NOT NULL,
	FOREIGN KEY (`company_id`) REFERENCES `company`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE INDEX `company_address_company` ON `company_address` (`company_id`);--> statement-breakpoint
CREATE TABLE `counter` (
	`company_id` text NOT NULL,
	`kind` text NOT NULL,
	`last` integer NOT NULL
);
--> statement-breakpoint
CREATE UNIQUE INDEX `counter_company_kind` ON `counter` (`company_id`,`kind`);--> statement-breakpoint
CREATE TABLE `invitation` (
	`id` text PRIMARY KEY NOT NULL,
	`company_id` text NOT NULL,
	`email` text NOT NULL,
	`roles` text NOT NULL,
	`token_hash` text NOT NULL,
	`state` text DEFAULT 'open' NOT NULL,
	`expires_at` integer NOT NULL,
	`invited_by` text NOT NULL,
	`created_at` integer NOT NULL,
	`accepted_by` text,
	`version` integer DEFAULT 1 NOT NULL,
	FOREIGN KEY (`company_id`) REFERENCES `company`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`invited_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`accepted_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `invitation_token_hash_unique` ON `invitation` (`token_hash`);--> statement-breakpoint
CREATE INDEX `invitation_company` ON `invitation` (`company_id`);--> statement-breakpoint
CREATE UNIQUE INDEX `invitation_open` ON `invitation` (`company_id`,`email`) WHERE state = 'open';--> statement-breakpoint
CREATE TABLE `membership` (
	`id` text PRIMARY KEY NOT NULL,
	`company_id` text NOT NULL,
	`user_id` text NOT NULL,
	`roles` text NOT NULL,
	`active` integer DEFAULT true NOT NULL,
	`created_at` integer NOT NULL,
	`version` integer DEFAULT 1 NOT NULL,
	FOREIGN KEY (`company_id`) REFERENCES `company`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`user_id`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `membership_company_user` ON `membership` (`company_id`,`user_id`);--> statement-breakpoint
CREATE INDEX `membership_user` ON `membership` (`user_id`);--> statement-breakpoint
CREATE TABLE `dispute` (
	`id` text PRIMARY KEY NOT NULL,
	`order_id` text NOT NULL,
	`milestone_id` text NOT NULL,
	`state` text NOT NULL,
	`reason` text NOT NULL,
	`complaint_about` text NOT NULL,
	`piece_id` text,
	`amount_claimed` integer NOT NULL,
	`text` text NOT NULL,
	`opened_by` text NOT NULL,
	`opened_by_company_id` text NOT NULL,
	`opened_at` integer NOT NULL,
	`answer_due_at` integer NOT NULL,
	`decision_due_at` integer NOT NULL,
	`appeal_until` integer,
	`closed_at` integer,
	`release_amount` integer,
	`refund_amount` integer,
	`command_id` text NOT NULL,
	`version` integer DEFAULT 1 NOT NULL,
	FOREIGN KEY (`order_id`) REFERENCES `coil_order`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`milestone_id`) REFERENCES `milestone`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`opened_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`opened_by_company_id`) REFERENCES `company`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `dispute_command_id_unique` ON `dispute` (`command_id`);--> statement-breakpoint
CREATE UNIQUE INDEX `dispute_open_per_milestone` ON `dispute` (`milestone_id`) WHERE state in ('open', 'answered', 'decided', 'appealed');--> statement-breakpoint
CREATE INDEX `dispute_state` ON `dispute` (`state`,`opened_at`);--> statement-breakpoint
CREATE INDEX `dispute_order` ON `dispute` (`order_id`);--> statement-breakpoint
CREATE TABLE `dispute_decision` (
	`id` text PRIMARY KEY NOT NULL,
	`dispute_id` text NOT NULL,
	`instance` integer NOT NULL,
	`release_amount` integer NOT NULL,
	`refund_amount` integer NOT NULL,
	`goods` text NOT NULL,
	`other_milestones` text NOT NULL,
	`freight_paid_by` text NOT NULL,
	`reason` text NOT NULL,
	`decided_by` text NOT NULL,
	`at` integer NOT NULL,
	FOREIGN KEY (`dispute_id`) REFERENCES `dispute`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`decided_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict,
	CONSTRAINT "dispute_decision_parts" CHECK("dispute_decision"."release_amount" >= 0 and "dispute_decision"."refund_amount" >= 0)
);
--> statement-breakpoint
CREATE UNIQUE INDEX `dispute_decision_instance` ON `dispute_decision` (`dispute_id`,`instance`);--> statement-breakpoint
CREATE TABLE `dispute_file` (
	`statement_id` text NOT NULL,
	`file_id` text NOT NULL,
	FOREIGN KEY (`statement_id`) REFERENCES `dispute_statement`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `dispute_file_once` ON `dispute_file` (`statement_id`,`file_id`);--> statement-breakpoint
CREATE TABLE `dispute_statement` (
	`id` text PRIMARY KEY NOT NULL,
	`dispute_id` text NOT NULL,
	`kind` text NOT NULL,
	`author_user_id` text NOT NULL,
	`author_company_id` text,
	`text` text NOT NULL,
	`at` integer NOT NULL,
	`command_id` text NOT NULL,
	FOREIGN KEY (`dispute_id`) REFERENCES `dispute`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`author_user_id`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`author_company_id`) REFERENCES `company`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `dispute_statement_command_id_unique` ON `dispute_statement` (`command_id`);--> statement-breakpoint
CREATE INDEX `dispute_statement_dispute` ON `dispute_statement` (`dispute_id`,`at`);--> statement-breakpoint
CREATE TABLE `settlement_offer` (
	`id` text PRIMARY KEY NOT NULL,
	`dispute_id` text NOT NULL,
	`company_id` text NOT NULL,
	`offered_by` text NOT NULL,
	`offered_at` integer NOT NULL,
	`release_amount` integer NOT NULL,
	`refund_amount` integer NOT NULL,
	`note` text NOT NULL,
	`state` text NOT NULL,
	`command_id` text NOT NULL,
	`version` integer DEFAULT 1 NOT NULL,
	FOREIGN KEY (`dispute_id`) REFERENCES `dispute`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`company_id`) REFERENCES `company`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`offered_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict,
	CONSTRAINT "settlement_offer_parts" CHECK("settlement_offer"."release_amount" >= 0 and "settlement_offer"."refund_amount" >= 0)
);
--> statement-breakpoint
CREATE UNIQUE INDEX `settlement_offer_command_id_unique` ON `settlement_offer` (`command_id`);--> statement-breakpoint
CREATE UNIQUE INDEX `settlement_offer_open` ON `settlement_offer` (`dispute_id`,`company_id`) WHERE state = 'open';--> statement-breakpoint
CREATE TABLE `company_document` (
	`id` text PRIMARY KEY NOT NULL,
	`company_id` text NOT NULL,
	`file_id` text NOT NULL,
	`kind` text NOT NULL,
	`title` text NOT NULL,
	`added_by` text NOT NULL,
	`added_at` integer NOT NULL,
	`archived_at` integer,
	`version` integer DEFAULT 1 NOT NULL,
	FOREIGN KEY (`company_id`) REFERENCES `company`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`file_id`) REFERENCES `file`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`added_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `company_document_file_id_unique` ON `company_document` (`file_id`);--> statement-breakpoint
CREATE INDEX `company_document_company` ON `company_document` (`company_id`,`archived_at`);--> statement-breakpoint
CREATE TABLE `file` (
	`id` text PRIMARY KEY NOT NULL,
	`owner_company_id` text NOT NULL,
	`uploaded_by` text NOT NULL,
	`purpose` text NOT NULL,
	`name` text NOT NULL,
	`content_type` text NOT NULL,
	`size` integer NOT NULL,
	`sha256` text,
	`storage_key` text,
	`incoming_key` text NOT NULL,
	`multipart_id` text,
	`state` text DEFAULT 'pending' NOT NULL,
	`refused_reason` text,
	`open_to_verified` integer DEFAULT false NOT NULL,
	`created_at` integer NOT NULL,
	`verified_at` integer,
	`expires_at` integer NOT NULL,
	`version` integer DEFAULT 1 NOT NULL,
	FOREIGN KEY (`owner_company_id`) REFERENCES `company`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`uploaded_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `file_storage_key_unique` ON `file` (`storage_key`);--> statement-breakpoint
CREATE UNIQUE INDEX `file_incoming_key_unique` ON `file` (`incoming_key`);--> statement-breakpoint
CREATE INDEX `file_owner` ON `file` (`owner_company_id`,`purpose`);--> statement-breakpoint
CREATE INDEX `file_unfinished` ON `file` (`expires_at`) WHERE "file"."state" = 'pending';--> statement-breakpoint
CREATE TABLE `file_audience` (
	`file_id` text NOT NULL,
	`company_id` text NOT NULL,
	`granted_at` integer NOT NULL,
	PRIMARY KEY(`file_id`, `company_id`),
	FOREIGN KEY (`file_id`) REFERENCES `file`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`company_id`) REFERENCES `company`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE TABLE `machine` (
	`id` text PRIMARY KEY NOT NULL,
	`company_id` text NOT NULL,
	`name` text NOT NULL,
	`body` text NOT NULL,
	`archived_at` integer,
	`created_at` integer NOT NULL,
	`updated_at` integer NOT NULL,
	`created_by` text NOT NULL,
	`command_id` text NOT NULL,
	`version` integer DEFAULT 1 NOT NULL,
	FOREIGN KEY (`company_id`) REFERENCES `company`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`created_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `machine_command_id_unique` ON `machine` (`command_id`);--> statement-breakpoint
CREATE INDEX `machine_company` ON `machine` (`company_id`,`archived_at`,`name`);--> statement-breakpoint
CREATE TABLE `machine_revision` (
	`id` text PRIMARY KEY NOT NULL,
	`machine_id` text NOT NULL,
	`number` integer NOT NULL,
	`body` text NOT NULL,
	`saved_at` integer NOT NULL,
	`saved_by` text NOT NULL,
	FOREIGN KEY (`machine_id`) REFERENCES `machine`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`saved_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `machine_revision_number` ON `machine_revision` (`machine_id`,`number`);--> statement-breakpoint
CREATE TABLE `charge_back` (
	`id` text PRIMARY KEY NOT NULL,
	`order_id` text NOT NULL,
	`milestone_id` text NOT NULL,
	`charge_id` text NOT NULL,
	`amount` integer NOT NULL,
	`currency` text NOT NULL,
	`state` text NOT NULL,
	`money_before` text NOT NULL,
	`opened_at` integer NOT NULL,
	`closed_at` integer,
	FOREIGN KEY (`order_id`) REFERENCES `coil_order`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`milestone_id`) REFERENCES `milestone`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE TABLE `ledger_account` (
	`id` text PRIMARY KEY NOT NULL,
	`key` text NOT NULL,
	`kind` text NOT NULL,
	`currency` text NOT NULL,
	`order_id` text,
	`milestone_id` text,
	`company_id` text,
	FOREIGN KEY (`order_id`) REFERENCES `coil_order`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`milestone_id`) REFERENCES `milestone`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`company_id`) REFERENCES `company`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `ledger_account_key_unique` ON `ledger_account` (`key`);--> statement-breakpoint
CREATE TABLE `ledger_entry` (
	`id` text PRIMARY KEY NOT NULL,
	`tx_id` text NOT NULL,
	`account_id` text NOT NULL,
	`milestone_id` text,
	`debit` integer NOT NULL,
	`credit` integer NOT NULL,
	`balance_transaction_id` text,
	FOREIGN KEY (`tx_id`) REFERENCES `ledger_tx`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`account_id`) REFERENCES `ledger_account`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`milestone_id`) REFERENCES `milestone`(`id`) ON UPDATE no action ON DELETE restrict,
	CONSTRAINT "ledger_entry_one_side" CHECK("ledger_entry"."debit" >= 0 and "ledger_entry"."credit" >= 0 and ("ledger_entry"."debit" = 0) <> ("ledger_entry"."credit" = 0))
);
--> statement-breakpoint
CREATE INDEX `ledger_entry_tx` ON `ledger_entry` (`tx_id`);--> statement-breakpoint
CREATE INDEX `ledger_entry_account` ON `ledger_entry` (`account_id`);--> statement-breakpoint
CREATE INDEX `ledger_entry_milestone` ON `ledger_entry` (`milestone_id`);--> statement-breakpoint
CREATE INDEX `ledger_entry_balance_transaction` ON `ledger_entry` (`balance_transaction_id`);--> statement-breakpoint
CREATE TABLE `ledger_tx` (
	`id` text PRIMARY KEY NOT NULL,
	`op_key` text NOT NULL,
	`kind` text NOT NULL,
	`order_id` text NOT NULL,
	`milestone_id` text,
	`currency` text NOT NULL,
	`reason` text NOT NULL,
	`object_id` text,
	`at` integer NOT NULL,
	FOREIGN KEY (`order_id`) REFERENCES `coil_order`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`milestone_id`) REFERENCES `milestone`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `ledger_tx_op_key_unique` ON `ledger_tx` (`op_key`);--> statement-breakpoint
CREATE INDEX `ledger_tx_order` ON `ledger_tx` (`order_id`,`at`);--> statement-breakpoint
CREATE TABLE `money_alarm` (
	`id` text PRIMARY KEY NOT NULL,
	`key` text NOT NULL,
	`kind` text NOT NULL,
	`order_id` text,
	`milestone_id` text,
	`object_id` text,
	`detail` text NOT NULL,
	`at` integer NOT NULL,
	`resolved_at` integer,
	`resolved_by` text,
	`resolution` text DEFAULT '' NOT NULL,
	FOREIGN KEY (`resolved_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `money_alarm_key_unique` ON `money_alarm` (`key`);--> statement-breakpoint
CREATE INDEX `money_alarm_open` ON `money_alarm` (`resolved_at`,`at`);--> statement-breakpoint
CREATE TABLE `payment_event` (
	`id` text PRIMARY KEY NOT NULL,
	`endpoint` text NOT NULL,
	`type` text NOT NULL,
	`object_id` text NOT NULL,
	`reference` text NOT NULL,
	`created` integer NOT NULL,
	`received_at` integer NOT NULL,
	`source` text NOT NULL,
	`state` text NOT NULL,
	`note` text DEFAULT '' NOT NULL,
	`processed_at` integer
);
--> statement-breakpoint
CREATE INDEX `payment_event_state` ON `payment_event` (`state`,`received_at`);--> statement-breakpoint
CREATE TABLE `payment_operation` (
	`id` text PRIMARY KEY NOT NULL,
	`key` text NOT NULL,
	`purpose` text NOT NULL,
	`generation` integer DEFAULT 1 NOT NULL,
	`kind` text NOT NULL,
	`order_id` text,
	`milestone_id` text,
	`company_id` text,
	`request` text NOT NULL,
	`request_hash` text NOT NULL,
	`state` text NOT NULL,
	`attempts` integer DEFAULT 0 NOT NULL,
	`object_id` text,
	`result` text,
	`error_code` text,
	`last_error` text,
	`planned_at` integer NOT NULL,
	`sent_at` integer,
	`known_at` integer,
	`next_try_at` integer NOT NULL,
	`version` integer DEFAULT 1 NOT NULL,
	FOREIGN KEY (`order_id`) REFERENCES `coil_order`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`milestone_id`) REFERENCES `milestone`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`company_id`) REFERENCES `company`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `payment_operation_key_unique` ON `payment_operation` (`key`);--> statement-breakpoint
CREATE INDEX `payment_operation_due` ON `payment_operation` (`state`,`next_try_at`);--> statement-breakpoint
CREATE UNIQUE INDEX `payment_operation_generation` ON `payment_operation` (`purpose`,`generation`);--> statement-breakpoint
CREATE INDEX `payment_operation_milestone` ON `payment_operation` (`milestone_id`);--> statement-breakpoint
CREATE UNIQUE INDEX `payment_operation_live` ON `payment_operation` (`purpose`) WHERE state in ('planned', 'sent', 'unknown');--> statement-breakpoint
CREATE TABLE `payment_session` (
	`id` text PRIMARY KEY NOT NULL,
	`order_id` text NOT NULL,
	`milestone_id` text NOT NULL,
	`attempt` integer NOT NULL,
	`operation_id` text,
	`session_id` text,
	`url` text,
	`amount` integer NOT NULL,
	`currency` text NOT NULL,
	`state` text NOT NULL,
	`payment_intent_id` text,
	`charge_id` text,
	`opened_by` text,
	`opened_at` integer NOT NULL,
	`expires_at` integer,
	`paid_at` integer,
	`version` integer DEFAULT 1 NOT NULL,
	FOREIGN KEY (`order_id`) REFERENCES `coil_order`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`milestone_id`) REFERENCES `milestone`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`operation_id`) REFERENCES `payment_operation`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`opened_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `payment_session_session_id_unique` ON `payment_session` (`session_id`);--> statement-breakpoint
CREATE UNIQUE INDEX `payment_session_open` ON `payment_session` (`milestone_id`) WHERE state in ('opening', 'open', 'processing');--> statement-breakpoint
CREATE UNIQUE INDEX `payment_session_paid` ON `payment_session` (`milestone_id`) WHERE state = 'paid';--> statement-breakpoint
CREATE UNIQUE INDEX `payment_session_attempt` ON `payment_session` (`milestone_id`,`attempt`);--> statement-breakpoint
CREATE INDEX `payment_session_intent` ON `payment_session` (`payment_intent_id`);--> statement-breakpoint
CREATE INDEX `payment_session_charge` ON `payment_session` (`charge_id`);--> statement-breakpoint
CREATE TABLE `payout_account` (
	`id` text PRIMARY KEY NOT NULL,
	`company_id` text NOT NULL,
	`account_id` text,
	`state` text NOT NULL,
	`requirements` text NOT NULL,
	`country` text NOT NULL,
	`created_by` text,
	`created_at` integer NOT NULL,
	`checked_at` integer,
	`version` integer DEFAULT 1 NOT NULL,
	FOREIGN KEY (`company_id`) REFERENCES `company`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`created_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `payout_account_company_id_unique` ON `payout_account` (`company_id`);--> statement-breakpoint
CREATE UNIQUE INDEX `payout_account_account_id_unique` ON `payout_account` (`account_id`);--> statement-breakpoint
CREATE TABLE `reconciliation_run` (
	`id` text PRIMARY KEY NOT NULL,
	`at` integer NOT NULL,
	`balanced` integer NOT NULL,
	`compared` integer NOT NULL,
	`differences` text NOT NULL
);
--> statement-breakpoint
CREATE TABLE `as_built_file` (
	`record_id` text NOT NULL,
	`file_id` text NOT NULL,
	`kind` text NOT NULL,
	FOREIGN KEY (`record_id`) REFERENCES `as_built_record`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `as_built_file_once` ON `as_built_file` (`record_id`,`file_id`);--> statement-breakpoint
CREATE TABLE `as_built_record` (
	`id` text PRIMARY KEY NOT NULL,
	`order_id` text NOT NULL,
	`piece_id` text NOT NULL,
	`attempt` integer NOT NULL,
	`body` text NOT NULL,
	`verdicts` text NOT NULL,
	`verdict` text NOT NULL,
	`state` text NOT NULL,
	`outcome` text,
	`specification_hash` text NOT NULL,
	`entered_by` text NOT NULL,
	`entered_at` integer NOT NULL,
	`judged_by` text,
	`judged_at` integer,
	`reasons` text DEFAULT '' NOT NULL,
	`command_id` text NOT NULL,
	`version` integer DEFAULT 1 NOT NULL,
	FOREIGN KEY (`order_id`) REFERENCES `coil_order`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`piece_id`) REFERENCES `piece`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`entered_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`judged_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `as_built_record_command_id_unique` ON `as_built_record` (`command_id`);--> statement-breakpoint
CREATE UNIQUE INDEX `as_built_record_attempt` ON `as_built_record` (`piece_id`,`attempt`);--> statement-breakpoint
CREATE INDEX `as_built_record_order` ON `as_built_record` (`order_id`);--> statement-breakpoint
CREATE TABLE `coil_order` (
	`id` text PRIMARY KEY NOT NULL,
	`number` integer NOT NULL,
	`request_id` text NOT NULL,
	`bid_id` text NOT NULL,
	`specification_id` text NOT NULL,
	`buyer_company_id` text NOT NULL,
	`fabricator_company_id` text NOT NULL,
	`title` text NOT NULL,
	`quantity` integer NOT NULL,
	`state` text NOT NULL,
	`currency` text NOT NULL,
	`net_amount` integer NOT NULL,
	`tax_amount` integer NOT NULL,
	`freight_amount` integer NOT NULL,
	`total_amount` integer NOT NULL,
	`fee_basis_points` integer NOT NULL,
	`inspection_days` integer NOT NULL,
	`buyer_zone` text NOT NULL,
	`lead_time_working_days` integer NOT NULL,
	`due_date` text,
	`need_by` text,
	`terms` text NOT NULL,
	`awarded_at` integer NOT NULL,
	`awarded_by` text,
	`acknowledged_at` integer,
	`acknowledged_by` text,
	`clock_stopped_at` integer,
	`clock_resumed_at` integer,
	`next_check_at` integer DEFAULT 0 NOT NULL,
	`closed_at` integer,
	`end_reason` text DEFAULT '' NOT NULL,
	`version` integer DEFAULT 1 NOT NULL,
	FOREIGN KEY (`buyer_company_id`) REFERENCES `company`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`fabricator_company_id`) REFERENCES `company`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`awarded_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`acknowledged_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `coil_order_bid_id_unique` ON `coil_order` (`bid_id`);--> statement-breakpoint
CREATE UNIQUE INDEX `coil_order_live_per_request` ON `coil_order` (`request_id`) WHERE state in ('to-acknowledge', 'running', 'suspended');--> statement-breakpoint
CREATE UNIQUE INDEX `coil_order_number` ON `coil_order` (`buyer_company_id`,`number`);--> statement-breakpoint
CREATE INDEX `coil_order_check` ON `coil_order` (`next_check_at`);--> statement-breakpoint
CREATE INDEX `coil_order_buyer` ON `coil_order` (`buyer_company_id`,`state`,`awarded_at`);--> statement-breakpoint
CREATE INDEX `coil_order_fabricator` ON `coil_order` (`fabricator_company_id`,`state`,`awarded_at`);--> statement-breakpoint
CREATE TABLE `deadline_notice` (
	`key` text PRIMARY KEY NOT NULL,
	`order_id` text NOT NULL,
	`at` integer NOT NULL
);
--> statement-breakpoint
CREATE TABLE `drawing_revision` (
	`id` text PRIMARY KEY NOT NULL,
	`order_id` text NOT NULL,
	`letter` text NOT NULL,
	`file_id` text NOT NULL,
	`note` text DEFAULT '' NOT NULL,
	`state` text NOT NULL,
	`sha256` text NOT NULL,
	`submitted_by` text NOT NULL,
	`submitted_at` integer NOT NULL,
	`judged_by` text,
	`judged_at` integer,
	`reasons` text DEFAULT '' NOT NULL,
	`command_id` text NOT NULL,
	`version` integer DEFAULT 1 NOT NULL,
	FOREIGN KEY (`order_id`) REFERENCES `coil_order`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`submitted_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`judged_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `drawing_revision_command_id_unique` ON `drawing_revision` (`command_id`);--> statement-breakpoint
CREATE UNIQUE INDEX `drawing_revision_letter` ON `drawing_revision` (`order_id`,`letter`);--> statement-breakpoint
CREATE TABLE `end_proposal` (
	`id` text PRIMARY KEY NOT NULL,
	`order_id` text NOT NULL,
	`company_id` text NOT NULL,
	`proposed_by` text NOT NULL,
	`proposed_at` integer NOT NULL,
	`parts` text NOT NULL,
	`work_in_hand` text NOT NULL,
	`reason` text NOT NULL,
	`state` text NOT NULL,
	`decided_by` text,
	`decided_at` integer,
	`command_id` text NOT NULL,
	`version` integer DEFAULT 1 NOT NULL,
	FOREIGN KEY (`order_id`) REFERENCES `coil_order`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`company_id`) REFERENCES `company`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`proposed_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`decided_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `end_proposal_command_id_unique` ON `end_proposal` (`command_id`);--> statement-breakpoint
CREATE UNIQUE INDEX `end_proposal_open` ON `end_proposal` (`order_id`) WHERE state = 'open';--> statement-breakpoint
CREATE TABLE `milestone` (
	`id` text PRIMARY KEY NOT NULL,
	`order_id` text NOT NULL,
	`position` integer NOT NULL,
	`kind` text NOT NULL,
	`amount` integer NOT NULL,
	`fee_base` integer NOT NULL,
	`work` text NOT NULL,
	`money` text NOT NULL,
	`attention` text,
	`due_date` text,
	`funding_asked_at` integer,
	`held_at` integer,
	`opened_at` integer,
	`submitted_at` integer,
	`accepted_at` integer,
	`window_ends_at` integer,
	`returned_count` integer DEFAULT 0 NOT NULL,
	`release_amount` integer DEFAULT 0 NOT NULL,
	`refund_amount` integer DEFAULT 0 NOT NULL,
	`closed_at` integer,
	`version` integer DEFAULT 1 NOT NULL,
	FOREIGN KEY (`order_id`) REFERENCES `coil_order`(`id`) ON UPDATE no action ON DELETE restrict,
	CONSTRAINT "milestone_amounts" CHECK("milestone"."amount" > 0 and "milestone"."fee_base" >= 0 and "milestone"."fee_base" <= "milestone"."amount"),
	CONSTRAINT "milestone_parts" CHECK("milestone"."release_amount" >= 0 and "milestone"."refund_amount" >= 0 and "milestone"."release_amount" + "milestone"."refund_amount" <= "milestone"."amount")
);
--> statement-breakpoint
CREATE UNIQUE INDEX `milestone_position` ON `milestone` (`order_id`,`position`);--> statement-breakpoint
CREATE INDEX `milestone_window` ON `milestone` (`money`,`window_ends_at`);--> statement-breakpoint
CREATE TABLE `milestone_return` (
	`id` text PRIMARY KEY NOT NULL,
	`milestone_id` text NOT NULL,
	`number` integer NOT NULL,
	`reasons` text NOT NULL,
	`returned_by` text NOT NULL,
	`at` integer NOT NULL,
	FOREIGN KEY (`milestone_id`) REFERENCES `milestone`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`returned_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `milestone_return_number` ON `milestone_return` (`milestone_id`,`number`);--> statement-breakpoint
CREATE TABLE `order_event` (
	`id` text PRIMARY KEY NOT NULL,
	`order_id` text NOT NULL,
	`milestone_id` text,
	`kind` text NOT NULL,
	`text` text NOT NULL,
	`user_id` text,
	`company_id` text,
	`at` integer NOT NULL,
	FOREIGN KEY (`order_id`) REFERENCES `coil_order`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`user_id`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`company_id`) REFERENCES `company`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE INDEX `order_event_order` ON `order_event` (`order_id`,`at`);--> statement-breakpoint
CREATE TABLE `order_message` (
	`id` text PRIMARY KEY NOT NULL,
	`order_id` text NOT NULL,
	`author_user_id` text NOT NULL,
	`author_company_id` text NOT NULL,
	`text` text NOT NULL,
	`at` integer NOT NULL,
	`command_id` text,
	FOREIGN KEY (`order_id`) REFERENCES `coil_order`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`author_user_id`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`author_company_id`) REFERENCES `company`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `order_message_command_id_unique` ON `order_message` (`command_id`);--> statement-breakpoint
CREATE INDEX `order_message_order` ON `order_message` (`order_id`,`at`);--> statement-breakpoint
CREATE TABLE `order_message_file` (
	`message_id` text NOT NULL,
	`file_id` text NOT NULL,
	FOREIGN KEY (`message_id`) REFERENCES `order_message`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `order_message_file_once` ON `order_message_file` (`message_id`,`file_id`);--> statement-breakpoint
CREATE TABLE `order_specification` (
	`id` text PRIMARY KEY NOT NULL,
	`order_id` text NOT NULL,
	`number` integer NOT NULL,
	`body` text NOT NULL,
	`hash` text NOT NULL,
	`reason` text NOT NULL,
	`created_at` integer NOT NULL,
	FOREIGN KEY (`order_id`) REFERENCES `coil_order`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `order_specification_number` ON `order_specification` (`order_id`,`number`);--> statement-breakpoint
CREATE TABLE `piece` (
	`id` text PRIMARY KEY NOT NULL,
	`order_id` text NOT NULL,
	`kind` text NOT NULL,
	`position` integer NOT NULL,
	`serial` text NOT NULL,
	`state` text NOT NULL,
	`replaces_piece_id` text,
	`created_at` integer NOT NULL,
	`version` integer DEFAULT 1 NOT NULL,
	FOREIGN KEY (`order_id`) REFERENCES `coil_order`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `piece_serial` ON `piece` (`order_id`,`serial`);--> statement-breakpoint
CREATE INDEX `piece_by_serial` ON `piece` (`serial`);--> statement-breakpoint
CREATE TABLE `shipment` (
	`id` text PRIMARY KEY NOT NULL,
	`order_id` text NOT NULL,
	`carrier` text NOT NULL,
	`tracking_number` text NOT NULL,
	`shipped_on` text NOT NULL,
	`note` text DEFAULT '' NOT NULL,
	`paper_file_id` text,
	`shipped_by` text NOT NULL,
	`created_at` integer NOT NULL,
	`delivered_on` text,
	`delivery_proof_at` integer,
	`proof_file_id` text,
	`received_at` integer,
	`received_by` text,
	`received_note` text DEFAULT '' NOT NULL,
	`command_id` text NOT NULL,
	`version` integer DEFAULT 1 NOT NULL,
	FOREIGN KEY (`order_id`) REFERENCES `coil_order`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`shipped_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`received_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `shipment_command_id_unique` ON `shipment` (`command_id`);--> statement-breakpoint
CREATE INDEX `shipment_order` ON `shipment` (`order_id`);--> statement-breakpoint
CREATE TABLE `audit_event` (
	`id` text PRIMARY KEY NOT NULL,
	`at` integer NOT NULL,
	`actor_kind` text NOT NULL,
	`actor_user_id` text,
	`company_id` text,
	`action` text NOT NULL,
	`subject_type` text NOT NULL,
	`subject_id` text NOT NULL,
	`detail` text NOT NULL,
	`request_id` text,
	`seal` text
);
--> statement-breakpoint
CREATE INDEX `audit_subject` ON `audit_event` (`subject_type`,`subject_id`,`id`);--> statement-breakpoint
CREATE INDEX `audit_type` ON `audit_event` (`subject_type`,`id`);--> statement-breakpoint
CREATE INDEX `audit_company` ON `audit_event` (`company_id`,`id`);--> statement-breakpoint
CREATE INDEX `audit_seal_rows` ON `audit_event` (`seal`,`id`);--> statement-breakpoint
CREATE INDEX `audit_unsealed` ON `audit_event` (`id`) WHERE "audit_event"."seal" is null;--> statement-breakpoint
CREATE TABLE `job` (
	`id` text PRIMARY KEY NOT NULL,
	`kind` text NOT NULL,
	`payload` text NOT NULL,
	`state` text DEFAULT 'queued' NOT NULL,
	`attempts` integer DEFAULT 0 NOT NULL,
	`run_at` integer NOT NULL,
	`lease_owner` text,
	`lease_until` integer,
	`last_error` text,
	`dedupe_key` text,
	`progress_ppm` integer DEFAULT 0 NOT NULL,
	`created_at` integer NOT NULL,
	`finished_at` integer
);
--> statement-breakpoint
CREATE INDEX `job_due` ON `job` (`state`,`run_at`);--> statement-breakpoint
CREATE INDEX `job_list` ON `job` (`state`,`id`);--> statement-breakpoint
CREATE UNIQUE INDEX `job_dedupe` ON `job` (`kind`,`dedupe_key`);--> statement-breakpoint
CREATE TABLE `notification` (
	`id` text PRIMARY KEY NOT NULL,
	`user_id` text NOT NULL,
	`kind` text NOT NULL,
	`title` text NOT NULL,
	`href` text NOT NULL,
	`at` integer NOT NULL,
	`read_at` integer,
	FOREIGN KEY (`user_id`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE INDEX `notification_user` ON `notification` (`user_id`,`read_at`,`at`);--> statement-breakpoint
CREATE INDEX `notification_list` ON `notification` (`user_id`,`at`,`id`);--> statement-breakpoint
CREATE TABLE `outbox_mail` (
	`id` text PRIMARY KEY NOT NULL,
	`kind` text NOT NULL,
	`to_user_id` text,
	`to_email` text NOT NULL,
	`subject` text NOT NULL,
	`body` text NOT NULL,
	`secret` integer DEFAULT false NOT NULL,
	`state` text DEFAULT 'queued' NOT NULL,
	`attempts` integer DEFAULT 0 NOT NULL,
	`run_at` integer NOT NULL,
	`lease_owner` text,
	`lease_until` integer,
	`last_error` text,
	`dedupe_key` text,
	`subject_type` text NOT NULL,
	`subject_id` text NOT NULL,
	`created_at` integer NOT NULL,
	`sent_at` integer,
	FOREIGN KEY (`to_user_id`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `outbox_mail_dedupe_key_unique` ON `outbox_mail` (`dedupe_key`);--> statement-breakpoint
CREATE INDEX `outbox_due` ON `outbox_mail` (`state`,`run_at`);--> statement-breakpoint
CREATE INDEX `outbox_subject` ON `outbox_mail` (`subject_type`,`subject_id`);--> statement-breakpoint
CREATE INDEX `outbox_about` ON `outbox_mail` (`subject_id`,`id`);--> statement-breakpoint
CREATE INDEX `outbox_list` ON `outbox_mail` (`state`,`id`);--> statement-breakpoint
CREATE TABLE `rate_limit` (
	`key` text PRIMARY KEY NOT NULL,
	`count` integer NOT NULL,
	`window_ends_at` integer NOT NULL
);
--> statement-breakpoint
CREATE TABLE `service_probe` (
	`name` text PRIMARY KEY NOT NULL,
	`ok` integer NOT NULL,
	`detail` text NOT NULL,
	`at` integer NOT NULL
);
--> statement-breakpoint
CREATE TABLE `setting` (
	`key` text PRIMARY KEY NOT NULL,
	`value` text NOT NULL
);
--> statement-breakpoint
CREATE TABLE `question` (
	`id` text PRIMARY KEY NOT NULL,
	`request_id` text NOT NULL,
	`company_id` text NOT NULL,
	`kind` text NOT NULL,
	`text` text NOT NULL,
	`asked_by` text NOT NULL,
	`asked_at` integer NOT NULL,
	`answer` text,
	`answered_by` text,
	`answered_at` integer,
	`command_id` text NOT NULL,
	`version` integer DEFAULT 1 NOT NULL,
	FOREIGN KEY (`request_id`) REFERENCES `request`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`company_id`) REFERENCES `company`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`asked_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`answered_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `question_command_id_unique` ON `question` (`command_id`);--> statement-breakpoint
CREATE INDEX `question_request` ON `question` (`request_id`,`asked_at`);--> statement-breakpoint
CREATE TABLE `request` (
	`id` text PRIMARY KEY NOT NULL,
	`company_id` text NOT NULL,
	`number` integer NOT NULL,
	`title` text NOT NULL,
	`state` text DEFAULT 'draft' NOT NULL,
	`form` text NOT NULL,
	`requirement` text,
	`commercial` text,
	`machine_id` text,
	`machine_version` integer,
	`current_specification_id` text,
	`shape` text,
	`tube_size` real,
	`material` text,
	`quantity` integer,
	`closes_at` integer,
	`posted_at` integer,
	`closed_at` integer,
	`close_reminder_at` integer,
	`buyer_zone` text,
	`withdraw_reason` text DEFAULT '' NOT NULL,
	`created_at` integer NOT NULL,
	`updated_at` integer NOT NULL,
	`created_by` text NOT NULL,
	`command_id` text NOT NULL,
	`version` integer DEFAULT 1 NOT NULL,
	FOREIGN KEY (`company_id`) REFERENCES `company`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`machine_id`) REFERENCES `machine`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`created_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `request_command_id_unique` ON `request` (`command_id`);--> statement-breakpoint
CREATE UNIQUE INDEX `request_company_number` ON `request` (`company_id`,`number`);--> statement-breakpoint
CREATE INDEX `request_company_state` ON `request` (`company_id`,`state`,`updated_at`);--> statement-breakpoint
CREATE INDEX `request_state_closes` ON `request` (`state`,`closes_at`,`id`);--> statement-breakpoint
CREATE TABLE `request_file` (
	`request_id` text NOT NULL,
	`file_id` text NOT NULL,
	`kind` text NOT NULL,
	`added_at` integer NOT NULL,
	PRIMARY KEY(`request_id`, `file_id`),
	FOREIGN KEY (`request_id`) REFERENCES `request`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE TABLE `specification` (
	`id` text PRIMARY KEY NOT NULL,
	`request_id` text NOT NULL,
	`number` integer NOT NULL,
	`body` text NOT NULL,
	`hash` text NOT NULL,
	`check_id` text NOT NULL,
	`created_at` integer NOT NULL,
	`created_by` text NOT NULL,
	FOREIGN KEY (`request_id`) REFERENCES `request`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`check_id`) REFERENCES `requirement_check`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`created_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `specification_number` ON `specification` (`request_id`,`number`);--> statement-breakpoint
CREATE TABLE `audit_seal` (
	`number` integer PRIMARY KEY NOT NULL,
	`at` integer NOT NULL,
	`row_count` integer NOT NULL,
	`previous` text NOT NULL,
	`seal` text NOT NULL
);
--> statement-breakpoint
CREATE UNIQUE INDEX `audit_seal_seal_unique` ON `audit_seal` (`seal`);--> statement-breakpoint
CREATE TABLE `fabricator_profile` (
	`company_id` text PRIMARY KEY NOT NULL,
	`statement` text NOT NULL,
	`capabilities` text NOT NULL,
	`works_address` text NOT NULL,
	`updated_at` integer NOT NULL,
	`version` integer DEFAULT 1 NOT NULL,
	FOREIGN KEY (`company_id`) REFERENCES `company`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE TABLE `verification_case` (
	`id` text PRIMARY KEY NOT NULL,
	`company_id` text NOT NULL,
	`state` text DEFAULT 'asked' NOT NULL,
	`statement` text NOT NULL,
	`capabilities` text NOT NULL,
	`works_address` text NOT NULL,
	`asked_by` text NOT NULL,
	`asked_at` integer NOT NULL,
	`decided_by` text,
	`decided_at` integer,
	`verified_items` text,
	`verified_until` integer,
	`reasons` text,
	`command_id` text NOT NULL,
	`version` integer DEFAULT 1 NOT NULL,
	FOREIGN KEY (`company_id`) REFERENCES `company`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`asked_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`decided_by`) REFERENCES `user`(`id`) ON UPDATE no action ON DELETE restrict
);
--> statement-breakpoint
CREATE UNIQUE INDEX `verification_case_command_id_unique` ON `verification_case` (`command_id`);--> statement-breakpoint
CREATE UNIQUE INDEX `verification_one_open` ON `verification_case` (`company_id`) WHERE "verification_case"."state" = 'asked';--> statement-breakpoint
CREATE INDEX `verification_queue` ON `verification_case` (`state`,`asked_at`);--> statement-breakpoint
CREATE INDEX `verification_company` ON `verification_case` (`company_id`,`asked_at`);--> statement-breakpoint
CREATE TABLE `verification_document` (
	`case_id` text NOT NULL,
	`document_id` text NOT NULL,
	PRIMARY KEY(`case_id`, `document_id`),
	FOREIGN KEY (`case_id`) REFERENCES `verification_case`(`id`) ON UPDATE no action ON DELETE restrict,
	FOREIGN KEY (`document_id`) REFERENCES `company_document`(`id`) ON UPDATE no action ON DELETE restrict
);
