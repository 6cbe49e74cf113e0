"""The tables behind the stores: revisions and heads; surveys and their pieces; records; events.

Left out: how a database gets them (``migrations``); a test holds both to the same columns.
"""

import sqlalchemy as sa

METADATA = sa.MetaData()

# PostgreSQL would sort by the locale of the database, where "-" does not count: pages of names
# come in the order of their bytes on every database.
NAME = sa.String(48).with_variant(sa.String(48, collation="C"), "postgresql")

KIND = sa.String(8)

REVISIONS = sa.Table(
    "document_revisions",
    METADATA,
    sa.Column("kind", KIND, primary_key=True),
    sa.Column("name", NAME, primary_key=True),
    sa.Column("revision", sa.Integer, primary_key=True, autoincrement=False),
    # JSON as text: a JSON column of a database may print numbers its own way.
    sa.Column("document", sa.Text, nullable=False),
    # JSON as text too: each kind of document has digests of its own.
    sa.Column("digests", sa.Text, nullable=False),
    sa.Column("digest", sa.String(8), nullable=False),
    sa.Column("author", sa.Text, nullable=False),
    sa.Column("reason", sa.Text, nullable=False),
    # Unix milliseconds: the same number on every database, and no time zone to lose.
    sa.Column("created_at_ms", sa.BigInteger, nullable=False),
    # Which revision of which cell an arm stands in; both empty where it names none.
    sa.Column("cell", NAME),
    sa.Column("cell_revision", sa.Integer),
    sa.Column("hidden_by", sa.Text),
    sa.Column("hidden_reason", sa.Text),
    sa.Column("hidden_at_ms", sa.BigInteger),
)

HEADS = sa.Table(
    "document_heads",
    METADATA,
    sa.Column("kind", KIND, primary_key=True),
    sa.Column("name", NAME, primary_key=True),
    sa.Column("revision", sa.Integer, nullable=False),
    sa.Column("hidden", sa.Boolean, nullable=False),
    sa.ForeignKeyConstraint(
        ["kind", "name", "revision"],
        [f"document_revisions.{column}" for column in ("kind", "name", "revision")],
        name="document_heads_revision",
    ),
)

SURVEYS = sa.Table(
    "surveys",
    METADATA,
    sa.Column("id", NAME, primary_key=True),
    sa.Column("kind", sa.String(32), nullable=False),
    sa.Column("title", sa.Text, nullable=False),
    sa.Column("state", sa.String(12), nullable=False, index=True),
    # JSON as text: what was asked but for its pieces, what the result is about, what was found.
    sa.Column("request", sa.Text, nullable=False),
    sa.Column("about", sa.Text, nullable=False),
    sa.Column("counts", sa.Text, nullable=False),
    sa.Column("total", sa.BigInteger, nullable=False),
    sa.Column("done", sa.BigInteger, nullable=False),
    sa.Column("reason", sa.Text, nullable=False),
    # SHA-256 of the sender's key and of the request that came with it.
    sa.Column("sent_key", sa.String(64), unique=True),
    sa.Column("sent_digest", sa.String(64)),
    sa.Column("created_at_ms", sa.BigInteger, nullable=False),
    sa.Column("started_at_ms", sa.BigInteger),
    sa.Column("finished_at_ms", sa.BigInteger),
)

SURVEY_PIECES = sa.Table(
    "survey_pieces",
    METADATA,
    sa.Column("survey", NAME, sa.ForeignKey("surveys.id", ondelete="CASCADE"), primary_key=True),
    sa.Column("number", sa.Integer, primary_key=True, autoincrement=False),
    sa.Column("size", sa.Integer, nullable=False),
    sa.Column("given", sa.LargeBinary, nullable=False),
    # Empty until the piece is done; then it is never written again.
    sa.Column("made", sa.LargeBinary),
)

RECORDS = sa.Table(
    "records",
    METADATA,
    sa.Column("id", NAME, primary_key=True),
    sa.Column("arm", NAME, nullable=False),
    sa.Column("serial", sa.Text, index=True),
    sa.Column("tag", sa.BigInteger),
    sa.Column("quality", sa.String(12), nullable=False),
    sa.Column("sampled_at_ms", sa.BigInteger, nullable=False, index=True),
    sa.Column("joint_count", sa.Integer, nullable=False),
    sa.Column("orientation_count", sa.Integer, nullable=False),
    # JSON as text: the record as it was answered, to the last digit.
    sa.Column("document", sa.Text, nullable=False),
    # SHA-256 of the sender's key and of the request that came with it.
    sa.Column("sent_key", sa.String(64), unique=True),
    sa.Column("sent_digest", sa.String(64)),
    sa.Index("ix_records_arm_id", "arm", "id"),
)

EVENTS = sa.Table(
    "events",
    METADATA,
    sa.Column("id", NAME, primary_key=True),
    # Counts every writing of an event, its beginning and its end: what a reader has seen up to.
    sa.Column("change", sa.BigInteger, nullable=False, unique=True),
    sa.Column("arm", NAME, nullable=False),
    sa.Column("kind", sa.String(32), nullable=False),
    sa.Column("state", sa.String(12), nullable=False, index=True),
    sa.Column("began_at_ms", sa.BigInteger, nullable=False),
    sa.Column("seen_at_ms", sa.BigInteger, nullable=False),
    sa.Column("ended_at_ms", sa.BigInteger),
    sa.Column("simulated", sa.Boolean, nullable=False),
    # JSON as text: peak, thresholds, what else belongs to the kind.
    sa.Column("document", sa.Text, nullable=False),
    # Which process watches, so that another can tell that it does no more.
    sa.Column("watcher", sa.BigInteger, nullable=False),
    sa.Index("ix_events_arm_change", "arm", "change"),
)
