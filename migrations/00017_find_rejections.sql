-- What is rejected again keeps its number, for which it is looked up in the newest edition.
CREATE INDEX edition_rejection_path ON edition_rejection (path, line, cause, until);
