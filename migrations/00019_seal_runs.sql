-- What runs left is found by their rows, and told by them: each has the CRC-32C of its values.
-- Triggers keep it, so that whoever writes a row seals it. The function is the program's own.
ALTER TABLE run ADD COLUMN seal INTEGER NOT NULL DEFAULT 0;
UPDATE run SET seal = crc32c(id, kind, program, started_at, ended_at, outcome, counts, edition_id);
CREATE TRIGGER run_begun AFTER INSERT ON run BEGIN
    UPDATE run SET seal = crc32c(id, kind, program, started_at, ended_at, outcome, counts, edition_id) WHERE id = NEW.id;
END;
CREATE TRIGGER run_changed AFTER UPDATE OF kind, program, started_at, ended_at, outcome, counts, edition_id ON run BEGIN
    UPDATE run SET seal = crc32c(id, kind, program, started_at, ended_at, outcome, counts, edition_id) WHERE id = NEW.id;
END;
