"""Surveys: what was asked, how far it is, and the pieces it is worked through in.

Left out: what later steps add. A step is never edited once it has been released.
"""

import sqlalchemy as sa
from alembic import op

revision = "0003"
down_revision = "0002"


def upgrade() -> None:
    """Create both tables.

    Source: the columns are explained in ``service/storage/schema.py``; they are repeated here
    because this step must go on doing the same when those change.
    """
    op.create_table(
        "surveys",
        sa.Column("id", _name(), primary_key=True),
        sa.Column("kind", sa.String(32), nullable=False),
        sa.Column("title", sa.Text, nullable=False),
        sa.Column("state", sa.String(12), nullable=False, index=True),
        sa.Column("request", sa.Text, nullable=False),
        sa.Column("about", sa.Text, nullable=False),
        sa.Column("counts", sa.Text, nullable=False),
        sa.Column("total", sa.BigInteger, nullable=False),
        sa.Column("done", sa.BigInteger, nullable=False),
        sa.Column("reason", sa.Text, nullable=False),
        sa.Column("sent_key", sa.String(64), unique=True),
        sa.Column("sent_digest", sa.String(64)),
        sa.Column("created_at_ms", sa.BigInteger, nullable=False),
        sa.Column("started_at_ms", sa.BigInteger),
        sa.Column("finished_at_ms", sa.BigInteger),
    )
    op.create_table(
        "survey_pieces",
        sa.Column(
            "survey", _name(), sa.ForeignKey("surveys.id", ondelete="CASCADE"), primary_key=True
        ),
        sa.Column("number", sa.Integer, primary_key=True, autoincrement=False),
        sa.Column("size", sa.Integer, nullable=False),
        sa.Column("given", sa.LargeBinary, nullable=False),
        sa.Column("made", sa.LargeBinary),
    )


def _name() -> sa.types.TypeEngine[str]:
    return sa.String(48).with_variant(sa.String(48, collation="C"), "postgresql")
