create trigger specification_no_update before update on specification begin select raise(abort, 'a specification is immutable'); end;
--> statement-breakpoint
create trigger specification_no_delete before delete on specification begin select raise(abort, 'a specification is immutable'); end;
--> statement-breakpoint
create virtual table request_search using fts5(request_id unindexed, title, words, tokenize = 'unicode61 remove_diacritics 2');
