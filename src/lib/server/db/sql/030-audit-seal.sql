create trigger audit_event_seal_once before update of seal on audit_event when old.seal is not null begin select raise(abort, 'a sealed row of the audit trail stays sealed'); end;
--> statement-breakpoint
create trigger audit_seal_no_update before update on audit_seal begin select raise(abort, 'seals are append-only'); end;
--> statement-breakpoint
create trigger audit_seal_no_delete before delete on audit_seal begin select raise(abort, 'seals are append-only'); end;
