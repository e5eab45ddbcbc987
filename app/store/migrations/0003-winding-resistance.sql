-- Of inductors; Ω. Null where it is not known, as on every line that was there before.
ALTER TABLE lines ADD COLUMN winding_resistance REAL CHECK (winding_resistance > 0);
