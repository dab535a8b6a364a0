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
