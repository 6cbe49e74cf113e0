"""Arms: every revision, and the head of each name.

Left out: what later steps add. A step is never edited once it has been released.
"""

import sqlalchemy as sa
from alembic import op

revision = "0001"
down_revision = None


def upgrade() -> None:
    """Create both tables.

    Source: the columns are explained in ``service/storage/schema.py``; they are repeated here
    because this step must go on doing the same when those change.
    """
    name = sa.String(48).with_variant(sa.String(48, collation="C"), "postgresql")
    op.create_table(
        "arm_revisions",
        sa.Column("name", name, primary_key=True),
        sa.Column("revision", sa.Integer, primary_key=True, autoincrement=False),
        sa.Column("document", sa.Text, nullable=False),
        sa.Column("table_digest", sa.String(64), nullable=False),
        sa.Column("setup_digest", sa.String(64), nullable=False),
        sa.Column("digest", sa.String(8), nullable=False),
        sa.Column("author", sa.Text, nullable=False),
        sa.Column("reason", sa.Text, nullable=False),
        sa.Column("created_at_ms", sa.BigInteger, nullable=False),
        sa.Column("hidden_by", sa.Text),
        sa.Column("hidden_reason", sa.Text),
        sa.Column("hidden_at_ms", sa.BigInteger),
    )
    op.create_table(
        "arm_heads",
        sa.Column("name", name, primary_key=True),
        sa.Column("revision", sa.Integer, nullable=False),
        sa.Column("hidden", sa.Boolean, nullable=False),
        sa.ForeignKeyConstraint(
            ["name", "revision"],
            ["arm_revisions.name", "arm_revisions.revision"],
            name="arm_heads_revision",
        ),
    )
