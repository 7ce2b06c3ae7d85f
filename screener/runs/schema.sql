-- The run file, schema 4. Later schemas are reached by migrations, which add tables and columns and change none.
-- A missing number is NULL, never NaN. Names and sentences are stored safe to show.

-- "SCRN" in ASCII: what tells a run file from any other SQLite file.
PRAGMA application_id = 0x5343524E;
PRAGMA user_version = 4;

BEGIN;

-- One row: what wrote this file.
CREATE TABLE version (
    schema INTEGER NOT NULL,
    tool TEXT NOT NULL,
    null_table TEXT NOT NULL,
    created TEXT NOT NULL -- UTC, ISO 8601
);

-- One row: what was asked, of which table, and whether every span was tried.
CREATE TABLE run (
    plan TEXT NOT NULL, -- JSON object, with the seed
    table_path BLOB NOT NULL, -- the bytes of the path, since a file name need not be text
    table_format TEXT NOT NULL,
    table_rows INTEGER NOT NULL,
    fingerprint TEXT NOT NULL,
    dialect TEXT NOT NULL DEFAULT '', -- how the table is written, on one line
    finished INTEGER NOT NULL DEFAULT 0
);

-- One row per sentence of the table's reader.
CREATE TABLE remark (
    position INTEGER PRIMARY KEY,
    sentence TEXT NOT NULL
);

-- One row per column of the table that is not screened.
CREATE TABLE set_aside (
    position INTEGER PRIMARY KEY,
    name TEXT NOT NULL,
    reason TEXT NOT NULL
);

-- One row per channel of the table, known before anything is scored.
CREATE TABLE channel (
    position INTEGER PRIMARY KEY,
    name TEXT NOT NULL,
    unit TEXT,
    below INTEGER NOT NULL DEFAULT 0, -- readings known only to lie below a detection limit
    above INTEGER NOT NULL DEFAULT 0
);

-- One row per value that looks like a code for a missing reading and was read as a number.
CREATE TABLE proposal (
    position INTEGER PRIMARY KEY,
    value TEXT NOT NULL,
    channels INTEGER NOT NULL,
    cells INTEGER NOT NULL
);

-- One row per file of a table made of several.
CREATE TABLE source_file (
    position INTEGER PRIMARY KEY,
    name TEXT NOT NULL,
    first_row INTEGER NOT NULL,
    rows INTEGER NOT NULL
);

-- One row per span of channels that was tried. A span with a failure is tried again when the run is resumed.
CREATE TABLE span (
    first INTEGER NOT NULL,
    stop INTEGER NOT NULL,
    failure TEXT,
    PRIMARY KEY (first, stop)
) WITHOUT ROWID;

-- One row per channel tried.
CREATE TABLE score (
    position INTEGER PRIMARY KEY,
    n INTEGER, -- NULL when its span failed
    missing INTEGER,
    reason TEXT, -- why it is not scored
    held INTEGER, -- the family it is held against
    closest INTEGER, -- the closest family that its own test does not reject
    conditions TEXT, -- in words
    step REAL, -- of its resolution
    n_effective REAL -- independent readings that a serial channel is worth
);

-- One row per family, in the order of the registry.
CREATE TABLE family (
    id INTEGER PRIMARY KEY,
    name TEXT NOT NULL UNIQUE
);

-- One row per family and channel scored. Family first: a whole run is read for one family at a time.
CREATE TABLE fit (
    family INTEGER NOT NULL,
    position INTEGER NOT NULL,
    r REAL,
    critical_r REAL,
    plain_critical_r REAL,
    p REAL,
    extrapolated INTEGER NOT NULL,
    location REAL,
    scale REAL,
    shape_1 REAL,
    shape_2 REAL,
    note TEXT,
    PRIMARY KEY (family, position)
) WITHOUT ROWID;

-- One row per channel scored: the sorted readings that its plots need, float64, little-endian.
CREATE TABLE kept_readings (
    position INTEGER PRIMARY KEY,
    readings BLOB NOT NULL
);

-- One row per channel scored: readings in row order for the plots that need it, float64, little-endian, NaN for missing.
CREATE TABLE readings_in_order (
    position INTEGER PRIMARY KEY,
    readings BLOB NOT NULL
);

-- One row per channel scored of a table of several files: n, mean and standard deviation of the readings of each file,
-- float64, little-endian, NaN where not defined.
CREATE TABLE by_file (
    position INTEGER PRIMARY KEY,
    summaries BLOB NOT NULL
);

-- One row per channel scored: the rows of its lowest readings, lowest first, then of its highest, int64, little-endian.
CREATE TABLE outermost (
    position INTEGER PRIMARY KEY,
    rows BLOB NOT NULL
);

-- One row per channel scored: its departure from the line in a few digits, from the low to the high tail.
CREATE TABLE strip (
    position INTEGER PRIMARY KEY,
    levels TEXT NOT NULL
);

-- One row per channel confirmed: what samples in its own autocorrelation say of its r.
CREATE TABLE confirmation (
    position INTEGER PRIMARY KEY,
    family TEXT NOT NULL,
    r REAL NOT NULL,
    samples INTEGER NOT NULL,
    as_small INTEGER NOT NULL,
    p REAL NOT NULL,
    critical_r REAL
);

-- One row per act of a user: what was decided or noted at once, for one channel or many.
CREATE TABLE act (
    id INTEGER PRIMARY KEY,
    made TEXT NOT NULL, -- UTC, ISO 8601
    made_by TEXT NOT NULL,
    undone INTEGER NOT NULL DEFAULT 0 -- 1: can be done again; 2: undone for good, since something else was done
);

-- One row per channel of an act: decision and note from then on. The last act that is not undone holds.
CREATE TABLE decided (
    position INTEGER NOT NULL,
    act INTEGER NOT NULL,
    decision TEXT,
    note TEXT,
    PRIMARY KEY (position, act)
) WITHOUT ROWID;

-- At most one row: where the user was when the screen was left.
CREATE TABLE view (
    id INTEGER PRIMARY KEY CHECK (id = 1),
    state TEXT NOT NULL -- JSON object
);

COMMIT;
