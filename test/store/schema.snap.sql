CREATE INDEX changes_by_key ON changes (what, key, id);

CREATE INDEX changes_by_step ON changes (step);

CREATE INDEX holdings_by_line ON holdings (line);

CREATE INDEX ledger_by_line ON ledger (line, id);

CREATE INDEX ledger_by_reference ON ledger (reference, id) WHERE reference <> '';

CREATE INDEX ledger_by_step ON ledger (step);

CREATE INDEX lines_by_available ON lines (retired, available);

CREATE INDEX lines_by_id ON lines (retired, id COLLATE NOCASE);

CREATE INDEX lines_by_location ON lines (retired, location);

CREATE INDEX lines_by_order_code ON lines (retired, order_code);

CREATE INDEX lines_by_package ON lines (retired, package);

CREATE INDEX lines_by_quantity ON lines (retired, quantity);

CREATE INDEX lines_by_rating ON lines (retired, rating);

CREATE INDEX lines_by_reserved ON lines (retired, reserved);

CREATE INDEX lines_by_supplier ON lines (retired, supplier);

CREATE INDEX lines_by_technology ON lines (retired, technology);

CREATE INDEX lines_by_temperature_coefficient ON lines (retired, temperature_coefficient);

CREATE INDEX lines_by_tolerance ON lines (retired, tolerance);

CREATE INDEX lines_by_type ON lines (retired, type);

CREATE INDEX lines_by_unit_cost ON lines (retired, unit_cost);

CREATE INDEX lines_by_value ON lines (retired, kind, value);

CREATE UNIQUE INDEX pieces_by_line ON pieces (line, mark) WHERE mark <> '';

CREATE INDEX pieces_of_line ON pieces (line);

CREATE TABLE builds (
  key INTEGER PRIMARY KEY,
  reference TEXT NOT NULL UNIQUE CHECK (reference <> ''),
  units INTEGER NOT NULL CHECK (units >= 0),
  units_used INTEGER NOT NULL CHECK (units_used >= 0),
  state TEXT NOT NULL CHECK (state IN ('reserved', 'released', 'used')),
  at TEXT NOT NULL,
  bill TEXT NOT NULL CHECK (json_valid(bill))
) STRICT;

CREATE TABLE changes (
  id INTEGER PRIMARY KEY AUTOINCREMENT,
  step INTEGER NOT NULL REFERENCES steps (id),
  what TEXT NOT NULL,
  key INTEGER NOT NULL,
  before TEXT CHECK (json_valid(before)),
  after TEXT CHECK (json_valid(after)),
  CHECK (before IS NOT NULL OR after IS NOT NULL)
) STRICT;

CREATE TABLE holdings (
  reference TEXT NOT NULL,
  line INTEGER NOT NULL REFERENCES lines (key),
  count INTEGER NOT NULL CHECK (count >= 0),
  PRIMARY KEY (reference, line)
) STRICT, WITHOUT ROWID;

CREATE TABLE ledger (
  id INTEGER PRIMARY KEY AUTOINCREMENT,
  step INTEGER NOT NULL REFERENCES steps (id),
  line INTEGER NOT NULL REFERENCES lines (key),
  kind TEXT NOT NULL CHECK (kind IN ('bought', 'used', 'counted', 'scrapped', 'reserved', 'released')),
  change INTEGER NOT NULL,
  reference TEXT NOT NULL CHECK (reference <> '' OR kind NOT IN ('reserved', 'released')),
  note TEXT NOT NULL,
  reverses INTEGER UNIQUE REFERENCES ledger (id),
  CHECK (reverses IS NOT NULL OR kind = 'counted' OR (change <> 0 AND (change > 0) = (kind IN ('bought', 'reserved'))))
) STRICT;

CREATE VIRTUAL TABLE line_words USING fts5 (
  id, kind, type, technology, package, location, supplier, order_code, notes,
  content = 'lines', content_rowid = 'key', tokenize = 'unicode61 remove_diacritics 2', prefix = '2 3', columnsize = 0, detail = none
);

CREATE TABLE lines (
  key INTEGER PRIMARY KEY,
  id TEXT NOT NULL UNIQUE CHECK (length(id) BETWEEN 1 AND 100),
  retired INTEGER NOT NULL DEFAULT 0 CHECK (retired IN (0, 1)),
  kind TEXT NOT NULL CHECK (kind IN ('resistor', 'capacitor', 'inductor', 'potentiometer', 'op-amp')),
  value REAL CHECK (value > 0),
  type TEXT COLLATE NOCASE CHECK (type <> ''),
  tolerance REAL CHECK (tolerance BETWEEN 0 AND 1),
  rating REAL CHECK (rating > 0),
  technology TEXT NOT NULL COLLATE NOCASE,
  temperature_coefficient REAL,
  package TEXT NOT NULL COLLATE NOCASE,
  location TEXT NOT NULL COLLATE NOCASE,
  quantity INTEGER NOT NULL DEFAULT 0 CHECK (quantity >= 0),
  reserved INTEGER NOT NULL DEFAULT 0 CHECK (reserved BETWEEN 0 AND quantity),
  supplier TEXT NOT NULL COLLATE NOCASE,
  order_code TEXT NOT NULL COLLATE NOCASE,
  currency TEXT NOT NULL,
  prices TEXT NOT NULL CHECK (json_valid(prices)),
  notes TEXT NOT NULL COLLATE NOCASE,
  available INTEGER NOT NULL GENERATED ALWAYS AS (quantity - reserved) VIRTUAL,
  unit_cost REAL GENERATED ALWAYS AS (CAST (json_extract(prices, '$[0].unitCost') AS REAL)) VIRTUAL, winding_resistance REAL CHECK (winding_resistance > 0),
  CHECK ((kind = 'op-amp') = (value IS NULL)),
  CHECK ((kind = 'op-amp') = (type IS NOT NULL))
) STRICT;

CREATE TABLE pieces (
  id INTEGER PRIMARY KEY AUTOINCREMENT,
  line INTEGER NOT NULL REFERENCES lines (key),
  mark TEXT NOT NULL,
  value REAL NOT NULL CHECK (value > 0),
  frequency REAL CHECK (frequency > 0)
) STRICT;

CREATE TABLE steps (
  id INTEGER PRIMARY KEY AUTOINCREMENT,
  at TEXT NOT NULL,
  label TEXT NOT NULL,
  undoes INTEGER UNIQUE REFERENCES steps (id)
) STRICT;

CREATE TRIGGER changes_are_never_changed BEFORE UPDATE ON changes BEGIN
  SELECT RAISE (ABORT, 'history is never changed');
END;

CREATE TRIGGER changes_are_never_cut BEFORE DELETE ON changes BEGIN
  SELECT RAISE (ABORT, 'history is never cut');
END;

CREATE TRIGGER ledger_is_never_changed BEFORE UPDATE ON ledger BEGIN
  SELECT RAISE (ABORT, 'the ledger is never changed');
END;

CREATE TRIGGER ledger_is_never_cut BEFORE DELETE ON ledger BEGIN
  SELECT RAISE (ABORT, 'the ledger is never cut');
END;

CREATE TRIGGER ledger_makes_holdings AFTER INSERT ON ledger WHEN new.kind IN ('reserved', 'released') BEGIN
  INSERT INTO holdings (reference, line, count) VALUES (new.reference, new.line, 0) ON CONFLICT DO NOTHING;
  UPDATE holdings SET count = count + new.change WHERE reference = new.reference AND line = new.line;
  DELETE FROM holdings WHERE reference = new.reference AND line = new.line AND count = 0;
END;

CREATE TRIGGER ledger_makes_quantities AFTER INSERT ON ledger BEGIN
  UPDATE lines SET
    quantity = quantity + iif(new.kind IN ('reserved', 'released'), 0, new.change),
    reserved = reserved + iif(new.kind IN ('reserved', 'released'), new.change, 0)
  WHERE key = new.line;
END;

CREATE TRIGGER lines_are_kept BEFORE DELETE ON lines BEGIN
  SELECT RAISE (ABORT, 'stock lines are retired, never deleted');
END;

CREATE TRIGGER steps_are_never_changed BEFORE UPDATE ON steps BEGIN
  SELECT RAISE (ABORT, 'history is never changed');
END;

CREATE TRIGGER steps_are_never_cut BEFORE DELETE ON steps BEGIN
  SELECT RAISE (ABORT, 'history is never cut');
END;
