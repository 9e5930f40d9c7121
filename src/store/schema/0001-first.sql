-- Times are epoch milliseconds (UTC). Tables may change with later numbers; the views are the interface.
-- What was measured, computed, decided or happened is only ever added: the triggers below refuse the rest.

CREATE TABLE configuration (
  sha256 TEXT PRIMARY KEY NOT NULL,
  text   TEXT NOT NULL
) STRICT, WITHOUT ROWID;

CREATE TABLE configuration_period (
  id     INTEGER PRIMARY KEY,
  sha256 TEXT NOT NULL REFERENCES configuration (sha256),
  since  INTEGER NOT NULL,
  until  INTEGER
) STRICT;

-- Bytes as they arrived, deflated, one row per content.
CREATE TABLE content (
  sha256 TEXT PRIMARY KEY NOT NULL,
  size   INTEGER NOT NULL,
  bytes  BLOB NOT NULL
) STRICT;

CREATE TABLE arrival (
  id          INTEGER PRIMARY KEY,
  instrument  TEXT NOT NULL,
  file        TEXT NOT NULL,
  sha256      TEXT NOT NULL REFERENCES content (sha256),
  size        INTEGER NOT NULL,
  inode       INTEGER NOT NULL,
  mtime       REAL NOT NULL,
  ctime       REAL NOT NULL,
  received_at INTEGER NOT NULL
) STRICT;
CREATE INDEX arrival_by_file ON arrival (instrument, file, id);
CREATE INDEX arrival_by_content ON arrival (instrument, sha256, id);

-- The newest row per arrival counts: a stored version may be superseded later.
CREATE TABLE arrival_outcome (
  id      INTEGER PRIMARY KEY,
  arrival INTEGER NOT NULL REFERENCES arrival (id),
  outcome TEXT NOT NULL CHECK (outcome IN ('stored', 'repeated', 'superseded', 'rejected')),
  reason  TEXT,
  at      INTEGER NOT NULL
) STRICT;
CREATE INDEX arrival_outcome_by_arrival ON arrival_outcome (arrival, id);

-- A spectrum as its file holds it: units and direction of the file; x and y are deflated little-endian float64.
CREATE TABLE spectrum (
  id          INTEGER PRIMARY KEY,
  arrival     INTEGER NOT NULL REFERENCES arrival (id),
  position    INTEGER NOT NULL,
  instrument  TEXT NOT NULL,
  sample      TEXT,
  measured_at INTEGER NOT NULL,
  as_read     TEXT NOT NULL,
  x           BLOB NOT NULL,
  y           BLOB NOT NULL,
  flags       TEXT NOT NULL,
  UNIQUE (arrival, position)
) STRICT;
CREATE INDEX spectrum_by_time ON spectrum (sample, instrument, measured_at, id);
CREATE INDEX spectrum_by_instrument ON spectrum (instrument, measured_at, id);

CREATE TABLE recipe (
  sha256 TEXT PRIMARY KEY NOT NULL,
  name   TEXT NOT NULL,
  body   TEXT NOT NULL
) STRICT, WITHOUT ROWID;

-- Which recipe a sample's spectra are fitted with; the newest row counts.
CREATE TABLE recipe_choice (
  id         INTEGER PRIMARY KEY,
  sample     TEXT NOT NULL,
  instrument TEXT NOT NULL,
  recipe     TEXT NOT NULL REFERENCES recipe (sha256),
  locked     INTEGER NOT NULL CHECK (locked IN (0, 1)),
  spectra    TEXT NOT NULL,
  why        TEXT NOT NULL,
  at         INTEGER NOT NULL
) STRICT;
CREATE INDEX recipe_choice_by_sample ON recipe_choice (sample, instrument, id);

-- `quantities`: {name: [value, u]} in the units of the rule language; `body`: everything, as JSON.
CREATE TABLE analysis (
  id            INTEGER PRIMARY KEY,
  spectrum      INTEGER NOT NULL REFERENCES spectrum (id),
  at            INTEGER NOT NULL,
  engine        TEXT NOT NULL,
  config_sha256 TEXT NOT NULL,
  study         TEXT,
  species       TEXT,
  recipe        TEXT REFERENCES recipe (sha256),
  delta_cm1 REAL, u_delta_cm1 REAL, b_cm1 REAL, u_b_cm1 REAL, c_cm1 REAL, u_c_cm1 REAL, beta REAL,
  nu1_cm1 REAL, u_nu1_cm1 REAL, nu2_cm1 REAL, u_nu2_cm1 REAL, nu3_cm1 REAL, u_nu3_cm1 REAL,
  max1_nm REAL, max2_nm REAL, max3_nm REAL,
  width1_cm1 REAL, width2_cm1 REAL, height1 REAL, height2 REAL,
  scatter REAL, extent REAL, u_extent REAL, temperature REAL, path REAL,
  rms REAL, noise REAL, reduced_chi2 REAL,
  verdict       TEXT CHECK (verdict IN ('pass', 'look', 'fail')),
  flags         TEXT NOT NULL,
  quantities    TEXT NOT NULL,
  body          TEXT NOT NULL
) STRICT;
CREATE INDEX analysis_by_spectrum ON analysis (spectrum, id);

-- The spectra of a sample's reference, frozen when complete, or by a person's decision; the newest row counts.
CREATE TABLE reference_set (
  id         INTEGER PRIMARY KEY,
  sample     TEXT NOT NULL,
  instrument TEXT NOT NULL,
  spectra    TEXT NOT NULL,
  at         INTEGER NOT NULL,
  decision   INTEGER REFERENCES decision (id)
) STRICT;
CREATE INDEX reference_set_by_sample ON reference_set (sample, instrument, id);

-- What each rule said of each spectrum when it was judged.
CREATE TABLE judgement (
  id       INTEGER PRIMARY KEY,
  spectrum INTEGER NOT NULL REFERENCES spectrum (id),
  rule     TEXT NOT NULL,
  outcome  TEXT NOT NULL CHECK (outcome IN ('rings', 'clears', 'holds', 'gathering', 'undecided')),
  what     TEXT NOT NULL,
  occasion INTEGER NOT NULL,
  evidence TEXT NOT NULL,
  at       INTEGER NOT NULL
) STRICT;
CREATE INDEX judgement_by_spectrum ON judgement (spectrum, rule);

-- How far a spectrum's sample was from its reference when it was judged: {quantity: [d, u]} on the scale of the quantity.
CREATE TABLE departure (
  id         INTEGER PRIMARY KEY,
  spectrum   INTEGER NOT NULL REFERENCES spectrum (id),
  sample     TEXT NOT NULL,
  departures TEXT NOT NULL
) STRICT;
CREATE INDEX departure_by_spectrum ON departure (spectrum, id);

CREATE TABLE alarm (
  id              INTEGER PRIMARY KEY,
  rule            TEXT NOT NULL,
  of              TEXT NOT NULL,
  subject         TEXT NOT NULL,
  study           TEXT,
  priority        TEXT NOT NULL,
  state           TEXT NOT NULL,
  active          INTEGER NOT NULL,
  latch           INTEGER NOT NULL,
  latched         INTEGER NOT NULL,
  shelved_until   INTEGER,
  raised_at       INTEGER,
  acknowledged_at INTEGER,
  acknowledged_by TEXT,
  returned_at     INTEGER,
  spectra         INTEGER NOT NULL,
  diagnosis       TEXT,
  confidence      REAL,
  message         TEXT NOT NULL,
  UNIQUE (rule, of, subject)
) STRICT;

-- Whether a rule's condition is true for a subject, per instrument that measures it.
CREATE TABLE watch (
  rule       TEXT NOT NULL,
  of         TEXT NOT NULL,
  subject    TEXT NOT NULL,
  instrument TEXT NOT NULL,
  active     INTEGER NOT NULL,
  PRIMARY KEY (rule, of, subject, instrument)
) STRICT, WITHOUT ROWID;

CREATE TABLE alarm_event (
  id    INTEGER PRIMARY KEY,
  alarm INTEGER NOT NULL REFERENCES alarm (id),
  at    INTEGER NOT NULL,
  event TEXT NOT NULL,
  by    TEXT NOT NULL,
  note  TEXT NOT NULL
) STRICT;
CREATE INDEX alarm_event_by_alarm ON alarm_event (alarm, id);

CREATE TABLE decision (
  id      INTEGER PRIMARY KEY,
  at      INTEGER NOT NULL,
  by      TEXT NOT NULL,
  what    TEXT NOT NULL,
  subject TEXT NOT NULL,
  why     TEXT NOT NULL
) STRICT;
CREATE INDEX decision_by_subject ON decision (subject, what, id);

-- That the daemon has drawn the consequences of a decision: judged anew what it touches. `note`: what went wrong.
CREATE TABLE decision_followed (
  decision INTEGER PRIMARY KEY NOT NULL REFERENCES decision (id),
  at       INTEGER NOT NULL,
  note     TEXT
) STRICT;

-- A spectrum's right sample; the newest row counts. Analyses and judgements up to the two ids were made under the name
-- it had before, and no longer count.
CREATE TABLE reassignment (
  id              INTEGER PRIMARY KEY,
  decision        INTEGER NOT NULL REFERENCES decision (id),
  spectrum        INTEGER NOT NULL REFERENCES spectrum (id),
  was             TEXT,
  sample          TEXT NOT NULL,
  analysed_before INTEGER NOT NULL,
  judged_before   INTEGER NOT NULL
) STRICT;
CREATE INDEX reassignment_by_spectrum ON reassignment (spectrum, id);
CREATE INDEX reassignment_by_sample ON reassignment (sample);

-- An instrument, a sample or a study is out of service from `since` until `until`; a row below ends that early.
CREATE TABLE out_of_service (
  id       INTEGER PRIMARY KEY,
  decision INTEGER NOT NULL REFERENCES decision (id),
  of       TEXT NOT NULL CHECK (of IN ('instrument', 'sample', 'study')),
  subject  TEXT NOT NULL,
  since    INTEGER NOT NULL,
  until    INTEGER NOT NULL CHECK (until > since)
) STRICT;
CREATE INDEX out_of_service_by_end ON out_of_service (until);

CREATE TABLE return_to_service (
  id       INTEGER PRIMARY KEY,
  decision INTEGER NOT NULL REFERENCES decision (id),
  period   INTEGER NOT NULL UNIQUE REFERENCES out_of_service (id),
  at       INTEGER NOT NULL
) STRICT;

-- A letter freezes facts; text is made from them at sending. One row per recipient.
CREATE TABLE letter (
  id         INTEGER PRIMARY KEY,
  alarm      INTEGER REFERENCES alarm (id),
  facts      TEXT NOT NULL,
  subject    TEXT NOT NULL,
  created_at INTEGER NOT NULL
) STRICT;

CREATE TABLE letter_recipient (
  id              INTEGER PRIMARY KEY,
  letter          INTEGER NOT NULL REFERENCES letter (id),
  recipient       TEXT NOT NULL,
  message_id      TEXT NOT NULL,
  in_reply_to     TEXT,
  state           TEXT NOT NULL CHECK (state IN ('waiting', 'sent', 'failed', 'withdrawn')),
  attempts        INTEGER NOT NULL,
  first_attempt_at INTEGER,
  next_attempt_at INTEGER,
  sent_at         INTEGER,
  last_error      TEXT,
  -- why it waits although nothing went wrong, such as the recipient's quiet hours
  held            TEXT,
  -- the letter that tells it in place of this one
  told_in         INTEGER REFERENCES letter (id),
  UNIQUE (letter, recipient)
) STRICT;
CREATE INDEX letter_recipient_due ON letter_recipient (state, next_attempt_at);
CREATE INDEX letter_by_alarm ON letter (alarm, id);

-- The daily letter that was written for a day of the room's calendar, with what it covers.
CREATE TABLE daily_letter (
  day    TEXT PRIMARY KEY NOT NULL,
  letter INTEGER NOT NULL REFERENCES letter (id),
  since  INTEGER NOT NULL,
  until  INTEGER NOT NULL
) STRICT, WITHOUT ROWID;

-- What the running daemon last said of itself, one row per subject; `status` reads it.
CREATE TABLE daemon_state (
  subject TEXT PRIMARY KEY NOT NULL,
  body    TEXT NOT NULL,
  at      INTEGER NOT NULL
) STRICT, WITHOUT ROWID;
