create trigger audit_event_no_delete before delete on audit_event begin select raise(abort, 'the audit trail is append-only'); end;
--> statement-breakpoint
create trigger audit_event_no_update before update of id, at, actor_kind, actor_user_id, company_id, action, subject_type, subject_id, detail, request_id on audit_event begin select raise(abort, 'the audit trail is append-only'); end;
