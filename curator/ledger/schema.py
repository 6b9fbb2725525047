"""The numbered migrations. A migration that has been released is never edited: a new one follows it."""

# Not OR IGNORE: a trigger takes over how the statement that set it off answers conflicts.
_COUNT_NEW = """
    INSERT INTO identity_count SELECT NEW.identity, 0
        WHERE NOT EXISTS (SELECT 1 FROM identity_count WHERE identity = NEW.identity);
    UPDATE identity_count SET photos = photos + 1 WHERE identity = NEW.identity;"""
_UNCOUNT_OLD = """
    UPDATE identity_count SET photos = photos - 1 WHERE identity = OLD.identity;
    DELETE FROM identity_count WHERE identity = OLD.identity AND photos = 0;"""

RECORD = (
    (
        "CREATE TABLE setting (key TEXT PRIMARY KEY, value TEXT NOT NULL)",
        """CREATE TABLE photo (
            id INTEGER PRIMARY KEY,
            raw BLOB NOT NULL UNIQUE,      -- file-system bytes of the path relative to the root
            name TEXT NOT NULL UNIQUE,     -- what is shown, compared and written
            identity TEXT NOT NULL,
            size INTEGER NOT NULL,
            mtime_ns INTEGER NOT NULL,
            digest TEXT,                   -- NULL where the bytes could not be read
            why TEXT)""",
        "CREATE INDEX photo_identity ON photo (identity)",
        """CREATE TABLE attribute (
            photo TEXT NOT NULL, attribute TEXT NOT NULL, value TEXT NOT NULL,
            PRIMARY KEY (photo, attribute)) WITHOUT ROWID""",
        """CREATE TABLE verdict (
            id INTEGER PRIMARY KEY,
            photo_a TEXT NOT NULL, photo_b TEXT NOT NULL, answer TEXT NOT NULL,
            annotator TEXT NOT NULL, at TEXT NOT NULL, shown TEXT NOT NULL,
            digest_a TEXT, digest_b TEXT,  -- what the files were then, should they be renamed or replaced
            UNIQUE (photo_a, photo_b, answer, annotator, at))""",
        # What people said is only ever added to.
        """CREATE TRIGGER verdict_is_never_changed BEFORE UPDATE ON verdict
           BEGIN SELECT RAISE(ABORT, 'verdicts are only ever added'); END""",
        """CREATE TRIGGER verdict_is_never_removed BEFORE DELETE ON verdict
           BEGIN SELECT RAISE(ABORT, 'verdicts are only ever added'); END""",
        """CREATE TABLE split (
            id INTEGER PRIMARY KEY, at TEXT NOT NULL, seed INTEGER NOT NULL,
            gap_to_bound REAL NOT NULL, recipe TEXT NOT NULL)""",
        """CREATE TABLE split_identity (
            split INTEGER NOT NULL REFERENCES split (id), identity TEXT NOT NULL, part TEXT NOT NULL,
            PRIMARY KEY (split, identity)) WITHOUT ROWID""",
        """CREATE TABLE edition (
            number INTEGER PRIMARY KEY, path TEXT NOT NULL, data_digest TEXT NOT NULL, seed INTEGER NOT NULL,
            recipe TEXT NOT NULL, at TEXT NOT NULL)""",
    ),
    (
        # What a person did in one go, so that it can be taken back in one go. Taking back and restoring are words too:
        # they are added as turns, and nothing said is ever changed or removed.
        """CREATE TABLE act (
            number INTEGER PRIMARY KEY, name TEXT NOT NULL, annotator TEXT NOT NULL, at TEXT NOT NULL)""",
        """CREATE TABLE act_turn (
            id INTEGER PRIMARY KEY, act INTEGER NOT NULL REFERENCES act (number),
            standing INTEGER NOT NULL, at TEXT NOT NULL)""",
        "CREATE INDEX act_turn_act ON act_turn (act)",
        """CREATE VIEW fallen_act AS
           SELECT act FROM act_turn AS turn
           WHERE standing = 0 AND id = (SELECT max(id) FROM act_turn WHERE act = turn.act)""",
        "ALTER TABLE verdict ADD COLUMN act INTEGER REFERENCES act (number)",
        "CREATE INDEX verdict_act ON verdict (act)",
        "ALTER TABLE split ADD COLUMN act INTEGER REFERENCES act (number)",
        """CREATE TABLE echo_answer (
            id INTEGER PRIMARY KEY,
            photo_a TEXT NOT NULL, photo_b TEXT NOT NULL, answer TEXT NOT NULL,
            annotator TEXT NOT NULL, at TEXT NOT NULL, act INTEGER NOT NULL REFERENCES act (number),
            digest_a TEXT, digest_b TEXT)""",
        "CREATE INDEX echo_answer_act ON echo_answer (act)",
        *(
            f"""CREATE TRIGGER {table}_is_never_{done} BEFORE {event} ON {table}
                BEGIN SELECT RAISE(ABORT, 'what people said is only ever added to'); END"""
            for table in ("act", "act_turn", "echo_answer")
            for event, done in (("UPDATE", "changed"), ("DELETE", "removed"))
        ),
        # The window filters identities by attribute.
        "CREATE INDEX attribute_value ON attribute (attribute, value)",
    ),
    (
        # Photos of each identity, kept by triggers: to count a million of them from a cold disk takes seconds.
        "CREATE TABLE identity_count (identity TEXT PRIMARY KEY, photos INTEGER NOT NULL) WITHOUT ROWID",
        "INSERT INTO identity_count SELECT identity, count(*) FROM photo GROUP BY identity",
        f"CREATE TRIGGER photo_is_counted AFTER INSERT ON photo BEGIN {_COUNT_NEW} END",
        f"CREATE TRIGGER photo_is_uncounted AFTER DELETE ON photo BEGIN {_UNCOUNT_OLD} END",
        f"""CREATE TRIGGER photo_is_counted_anew AFTER UPDATE OF identity ON photo WHEN OLD.identity != NEW.identity
            BEGIN {_UNCOUNT_OLD} {_COUNT_NEW} END""",
    ),
)

DERIVED = (
    (
        """CREATE TABLE reading (
            id INTEGER PRIMARY KEY,
            digest TEXT NOT NULL, maker TEXT NOT NULL, why TEXT,
            file_bytes INTEGER NOT NULL, width INTEGER NOT NULL, height INTEGER NOT NULL,
            dct BLOB NOT NULL, difference BLOB NOT NULL, mirror BLOB NOT NULL,
            sharpness REAL NOT NULL, brightness REAL NOT NULL, contrast REAL NOT NULL, clipped REAL NOT NULL,
            faces INTEGER NOT NULL, frame BLOB, landmarks BLOB, eye_distance REAL, embedding BLOB,
            UNIQUE (digest, maker))""",
        # Apart from the readings, so that loading the columns of a large roll does not wade through pictures.
        """CREATE TABLE thumbnail (
            id INTEGER PRIMARY KEY, digest TEXT NOT NULL UNIQUE, jpeg BLOB NOT NULL)""",
        "CREATE TABLE finding (kind TEXT PRIMARY KEY, key TEXT NOT NULL, document TEXT NOT NULL)",
    ),
    (
        """CREATE TABLE array (
            kind TEXT PRIMARY KEY, key TEXT NOT NULL, dtype TEXT NOT NULL, shape TEXT NOT NULL, data BLOB NOT NULL)""",
    ),
    # Each intake asks for these, and must not wade through the readings to find them.
    ("CREATE INDEX reading_refused ON reading (maker, digest, why) WHERE why IS NOT NULL",),
)
