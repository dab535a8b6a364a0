create trigger audit_event_no_delete before delete on audit_event begin select raise(abort, 'the audit trail is append-only'); end;
--> statement-breakpoint
create trigger audit_event_no_update before update of id, at, actor_kind, actor_user_id, company_id, action, subject_type, subject_id, detail, request_id on audit_event begin select raise(abort, 'the audit trail is append-only'); end;
--> statement-breakpoint
create trigger ledger_tx_no_delete before delete on ledger_tx begin select raise(abort, 'the ledger is append-only'); end;
--> statement-breakpoint
create trigger ledger_tx_no_update before update on ledger_tx begin select raise(abort, 'the ledger is append-only'); end;
--> statement-breakpoint
create trigger ledger_entry_no_delete before delete on ledger_entry begin select raise(abort, 'the ledger is append-only'); end;
--> statement-breakpoint
create trigger ledger_entry_no_update before update on ledger_entry begin select raise(abort, 'the ledger is append-only'); end;
--> statement-breakpoint
create trigger ledger_account_no_delete before delete on ledger_account begin select raise(abort, 'the ledger is append-only'); end;
--> statement-breakpoint
create trigger ledger_account_no_update before update on ledger_account begin select raise(abort, 'the ledger is append-only'); end;
--> statement-breakpoint
create trigger order_event_no_delete before delete on order_event begin select raise(abort, 'the history of an order is append-only'); end;
--> statement-breakpoint
create trigger order_event_no_update before update on order_event begin select raise(abort, 'the history of an order is append-only'); end;
--> statement-breakpoint
create trigger specification_no_update before update on specification begin select raise(abort, 'a specification is immutable'); end;
--> statement-breakpoint
create trigger specification_no_delete before delete on specification begin select raise(abort, 'a specification is immutable'); end;
--> statement-breakpoint
create virtual table request_search using fts5(request_id unindexed, title, words, tokenize = 'unicode61 remove_diacritics 2');
--> statement-breakpoint
create trigger audit_event_seal_once before update of seal on audit_event when old.seal is not null begin select raise(abort, 'a sealed row of the audit trail stays sealed'); end;
--> statement-breakpoint
create trigger audit_seal_no_update before update on audit_seal begin select raise(abort, 'seals are append-only'); end;
--> statement-breakpoint
create trigger audit_seal_no_delete before delete on audit_seal begin select raise(abort, 'seals are append-only'); end;
