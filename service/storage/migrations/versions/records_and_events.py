"""Records of poses, and events of arms.

Left out: what later steps add. A step is never edited once it has been released.
"""

import sqlalchemy as sa
from alembic import op

revision = "0004"
down_revision = "0003"


def upgrade() -> None:
    """Create both tables.

    Source: the columns are explained in ``service/storage/schema.py``; they are repeated here
    because this step must go on doing the same when those change.
    """
    op.create_table(
        "records",
        sa.Column("id", _name(), primary_key=True),
        sa.Column("arm", _name(), nullable=False),
        sa.Column("serial", sa.Text, index=True),
        sa.Column("tag", sa.BigInteger),
        sa.Column("quality", sa.String(12), nullable=False),
        sa.Column("sampled_at_ms", sa.BigInteger, nullable=False, index=True),
        sa.Column("joint_count", sa.Integer, nullable=False),
        sa.Column("orientation_count", sa.Integer, nullable=False),
        sa.Column("document", sa.Text, nullable=False),
        sa.Column("sent_key", sa.String(64), unique=True),
        sa.Column("sent_digest", sa.String(64)),
    )
    op.create_index("ix_records_arm_id", "records", ["arm", "id"])
    op.create_table(
        "events",
        sa.Column("id", _name(), primary_key=True),
        sa.Column("change", sa.BigInteger, nullable=False, unique=True),
        sa.Column("arm", _name(), nullable=False),
        sa.Column("kind", sa.String(32), nullable=False),
        sa.Column("state", sa.String(12), nullable=False, index=True),
        sa.Column("began_at_ms", sa.BigInteger, nullable=False),
        sa.Column("seen_at_ms", sa.BigInteger, nullable=False),
        sa.Column("ended_at_ms", sa.BigInteger),
        sa.Column("simulated", sa.Boolean, nullable=False),
        sa.Column("document", sa.Text, nullable=False),
        sa.Column("watcher", sa.BigInteger, nullable=False),
    )
    op.create_index("ix_events_arm_change", "events", ["arm", "change"])


def _name() -> sa.types.TypeEngine[str]:
    return sa.String(48).with_variant(sa.String(48, collation="C"), "postgresql")
