-- The first form of the store: plants with their immutable plant files, logs with their periods, balances with everything
-- that is shown of them, and the same by columns for trends.
--
-- Ids are made by the program. Times are milliseconds since 1970, UTC. Nothing is ever overwritten but the state of a
-- log's work, the mark of a balance that a later log has superseded, and the columns, which can be made anew from the
-- records.

CREATE TABLE plants (
    id TEXT NOT NULL PRIMARY KEY,
    name TEXT NOT NULL UNIQUE,
    created_at INTEGER NOT NULL
) STRICT;

-- The revision in force at a time is the last one, by number, of those that are valid from then or earlier; the first of
-- a plant is valid from ever on (valid_from is null).
CREATE TABLE revisions (
    plant TEXT NOT NULL REFERENCES plants (id),
    number INTEGER NOT NULL,
    hash TEXT NOT NULL,
    valid_from INTEGER,
    created_at INTEGER NOT NULL,
    text TEXT NOT NULL,
    PRIMARY KEY (plant, number)
) STRICT;

-- The file of a log lies beside the database under the name of its sha256. The same bytes, looked at by the same kind of
-- period, are one log of a plant however often they are uploaded.
CREATE TABLE logs (
    id TEXT NOT NULL PRIMARY KEY,
    plant TEXT NOT NULL REFERENCES plants (id),
    name TEXT NOT NULL,
    size INTEGER NOT NULL,
    sha256 TEXT NOT NULL,
    periods TEXT NOT NULL,
    uploaded_at INTEGER NOT NULL,
    state TEXT NOT NULL,
    period_count INTEGER,
    rejected_count INTEGER,
    balance_count INTEGER NOT NULL DEFAULT 0,
    begins_at INTEGER,
    ends_at INTEGER,
    -- Notes, faults and the reason of a failure, as JSON.
    said TEXT NOT NULL,
    UNIQUE (plant, sha256, periods)
) STRICT;

-- Stretches of a log: those that were balanced, and those that could not be, with the reason.
CREATE TABLE steady_periods (
    log TEXT NOT NULL REFERENCES logs (id),
    begins_at INTEGER NOT NULL,
    ends_at INTEGER NOT NULL,
    rejected TEXT,
    PRIMARY KEY (log, begins_at, ends_at)
) STRICT;

-- What the numbers of a record mean: one a plant file and version of the program.
CREATE TABLE layouts (
    plant TEXT NOT NULL REFERENCES plants (id),
    id TEXT NOT NULL,
    created_at INTEGER NOT NULL,
    text TEXT NOT NULL,
    PRIMARY KEY (plant, id)
) STRICT;

CREATE TABLE balances (
    id TEXT NOT NULL PRIMARY KEY,
    plant TEXT NOT NULL,
    revision INTEGER NOT NULL,
    log TEXT NOT NULL REFERENCES logs (id),
    layout TEXT NOT NULL,
    begins_at INTEGER NOT NULL,
    ends_at INTEGER NOT NULL,
    converged INTEGER NOT NULL,
    -- Null where it did not converge.
    test_passes INTEGER,
    -- Names of what its findings suspect, as JSON.
    found TEXT NOT NULL,
    -- Share of error-free balances in which anything is found.
    false_alarm_rate REAL NOT NULL,
    program_version TEXT NOT NULL,
    -- The log whose balances of the same time count instead.
    superseded_by TEXT REFERENCES logs (id),
    UNIQUE (log, begins_at, ends_at),
    FOREIGN KEY (plant, revision) REFERENCES revisions (plant, number),
    FOREIGN KEY (plant, layout) REFERENCES layouts (plant, id)
) STRICT;
CREATE INDEX balances_by_time ON balances (plant, begins_at, id);

CREATE TABLE records (
    balance TEXT NOT NULL PRIMARY KEY REFERENCES balances (id),
    record BLOB NOT NULL
) STRICT;

CREATE TABLE findings (
    balance TEXT NOT NULL REFERENCES balances (id),
    place INTEGER NOT NULL,
    plant TEXT NOT NULL REFERENCES plants (id),
    begins_at INTEGER NOT NULL,
    at TEXT NOT NULL,
    -- The finding as JSON.
    document TEXT NOT NULL,
    PRIMARY KEY (balance, place)
) STRICT;
CREATE INDEX findings_by_time ON findings (plant, begins_at);

-- Columns by quantity and day (UTC) over the balances that converged and count.
CREATE TABLE day_marks (
    plant TEXT NOT NULL REFERENCES plants (id),
    day INTEGER NOT NULL,
    marks BLOB NOT NULL,
    PRIMARY KEY (plant, day)
) STRICT;

CREATE TABLE day_columns (
    plant TEXT NOT NULL REFERENCES plants (id),
    series TEXT NOT NULL,
    -- What it measures: values are in SI, and only values of one dimension make a trend.
    measure TEXT NOT NULL,
    day INTEGER NOT NULL,
    block BLOB NOT NULL,
    PRIMARY KEY (plant, series, measure, day)
) STRICT;
CREATE INDEX day_columns_by_day ON day_columns (plant, day);
