"""Tables of the store, as the steps that lead to them; PRAGMA user_version counts the steps taken."""

APPLICATION_ID = 0x47574F52  # marks the file as ours

MIGRATIONS: tuple[tuple[str, ...], ...] = (
    (
        """CREATE TABLE source (
            id TEXT PRIMARY KEY,
            name TEXT NOT NULL,
            licence TEXT NOT NULL,
            attribution TEXT NOT NULL,
            imported_at TEXT NOT NULL,
            rows_kept INTEGER NOT NULL,
            rows_refused INTEGER NOT NULL
        )""",
        """CREATE TABLE transmitter (
            number INTEGER PRIMARY KEY,
            id TEXT NOT NULL UNIQUE,
            source TEXT NOT NULL REFERENCES source (id) ON DELETE CASCADE,
            name TEXT NOT NULL,
            latitude_deg REAL NOT NULL,
            longitude_deg REAL NOT NULL,
            ground_amsl_m REAL
        )""",
        "CREATE INDEX transmitter_source ON transmitter (source)",
        # 32-bit boxes, rounded outwards by SQLite: a first sieve, never the answer.
        "CREATE VIRTUAL TABLE transmitter_box USING rtree (number, south, north, west, east)",
        """CREATE TRIGGER transmitter_enters AFTER INSERT ON transmitter BEGIN
            INSERT INTO transmitter_box
            VALUES (new.number, new.latitude_deg, new.latitude_deg, new.longitude_deg, new.longitude_deg);
        END""",
        """CREATE TRIGGER transmitter_leaves AFTER DELETE ON transmitter BEGIN
            DELETE FROM transmitter_box WHERE number = old.number;
        END""",
        """CREATE TABLE multiplex (
            source TEXT NOT NULL REFERENCES source (id) ON DELETE CASCADE,
            id TEXT NOT NULL,
            name TEXT NOT NULL,
            PRIMARY KEY (source, id)
        )""",
        """CREATE TABLE emission (
            id TEXT PRIMARY KEY,
            source TEXT NOT NULL,
            transmitter INTEGER NOT NULL REFERENCES transmitter (number) ON DELETE CASCADE,
            multiplex TEXT NOT NULL,
            channel TEXT NOT NULL,
            frequency_mhz REAL NOT NULL,
            bandwidth_mhz REAL NOT NULL,
            system TEXT NOT NULL,
            mode TEXT NOT NULL,
            erp_kw REAL NOT NULL,
            polarisation TEXT NOT NULL,
            antenna_agl_m REAL NOT NULL,
            pattern_cdb BLOB NOT NULL,   -- uint16, little-endian, 0.01 dB; empty where round
            valid_from TEXT,
            valid_to TEXT,
            flags TEXT NOT NULL,         -- separated by spaces
            is_on INTEGER NOT NULL,
            FOREIGN KEY (source, multiplex) REFERENCES multiplex (source, id) ON DELETE CASCADE
        )""",
        "CREATE INDEX emission_transmitter ON emission (transmitter)",
        "CREATE INDEX emission_multiplex ON emission (source, multiplex)",
        """CREATE TABLE document (
            kind TEXT NOT NULL,
            id TEXT NOT NULL,
            name TEXT NOT NULL,
            body TEXT NOT NULL,          -- JSON
            created TEXT NOT NULL,
            updated TEXT NOT NULL,
            PRIMARY KEY (kind, id)
        )""",
    ),
    (
        "ALTER TABLE emission ADD COLUMN guard TEXT NOT NULL DEFAULT ''",
        "ALTER TABLE emission ADD COLUMN static_delay_us REAL",
    ),
    (
        """CREATE TABLE reading (
            number INTEGER PRIMARY KEY,
            id TEXT NOT NULL UNIQUE,
            latitude_deg REAL NOT NULL,
            longitude_deg REAL NOT NULL,
            body TEXT NOT NULL,          -- JSON
            created TEXT NOT NULL,
            updated TEXT NOT NULL
        )""",
        "CREATE INDEX reading_place ON reading (latitude_deg, longitude_deg)",
    ),
)
