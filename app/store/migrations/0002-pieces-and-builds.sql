-- Single items that the user has measured.
CREATE TABLE pieces (
  id INTEGER PRIMARY KEY AUTOINCREMENT,
  line INTEGER NOT NULL REFERENCES lines (key),
  mark TEXT NOT NULL,
  value REAL NOT NULL CHECK (value > 0),
  frequency REAL CHECK (frequency > 0)
) STRICT;

CREATE UNIQUE INDEX pieces_by_line ON pieces (line, mark) WHERE mark <> '';
CREATE INDEX pieces_of_line ON pieces (line);

-- What each project or build holds of a line: the ledger's reservations, added up.
CREATE TABLE holdings (
  reference TEXT NOT NULL,
  line INTEGER NOT NULL REFERENCES lines (key),
  count INTEGER NOT NULL CHECK (count >= 0),
  PRIMARY KEY (reference, line)
) STRICT, WITHOUT ROWID;

CREATE INDEX holdings_by_line ON holdings (line);

INSERT INTO holdings (reference, line, count)
SELECT reference, line, sum(change) FROM ledger WHERE kind IN ('reserved', 'released') GROUP BY reference, line HAVING sum(change) > 0;

CREATE TRIGGER ledger_makes_holdings AFTER INSERT ON ledger WHEN new.kind IN ('reserved', 'released') BEGIN
  INSERT INTO holdings (reference, line, count) VALUES (new.reference, new.line, 0) ON CONFLICT DO NOTHING;
  UPDATE holdings SET count = count + new.change WHERE reference = new.reference AND line = new.line;
  DELETE FROM holdings WHERE reference = new.reference AND line = new.line AND count = 0;
END;

-- Units that were planned for a project or build, and what a unit takes.
CREATE TABLE builds (
  key INTEGER PRIMARY KEY,
  reference TEXT NOT NULL UNIQUE CHECK (reference <> ''),
  units INTEGER NOT NULL CHECK (units >= 0),
  units_used INTEGER NOT NULL CHECK (units_used >= 0),
  state TEXT NOT NULL CHECK (state IN ('reserved', 'released', 'used')),
  at TEXT NOT NULL,
  bill TEXT NOT NULL CHECK (json_valid(bill))
) STRICT;
