"""Cells beside arms: one pair of tables for documents of every kind, and which cell an arm is in.

Left out: what later steps add. A step is never edited once it has been released.
"""

from typing import Any

import sqlalchemy as sa
from alembic import op

revision = "0002"
down_revision = "0001"

_REVISIONS = ("name", "revision", "document", "digest", "author", "reason", "created_at_ms")
_HIDDEN = ("hidden_by", "hidden_reason", "hidden_at_ms")
_HEADS = ("name", "revision", "hidden")


def upgrade() -> None:
    """Create the new tables, bring every arm over as it is, and drop the old tables.

    Source: the columns are explained in ``service/storage/schema.py``; they are repeated here
    because this step must go on doing the same when those change.
    """
    digests = _digests().label("digests")
    _bring_over(
        "arm_revisions", _created_revisions(), *map(sa.column, _REVISIONS + _HIDDEN), digests
    )
    _bring_over("arm_heads", _created_heads(), *map(sa.column, _HEADS))
    op.drop_table("arm_heads")
    op.drop_table("arm_revisions")


def _created_revisions() -> sa.Table:
    return op.create_table(
        "document_revisions",
        sa.Column("kind", sa.String(8), primary_key=True),
        sa.Column("name", _name(), primary_key=True),
        sa.Column("revision", sa.Integer, primary_key=True, autoincrement=False),
        sa.Column("document", sa.Text, nullable=False),
        sa.Column("digests", sa.Text, nullable=False),
        sa.Column("digest", sa.String(8), nullable=False),
        sa.Column("author", sa.Text, nullable=False),
        sa.Column("reason", sa.Text, nullable=False),
        sa.Column("created_at_ms", sa.BigInteger, nullable=False),
        sa.Column("cell", _name()),
        sa.Column("cell_revision", sa.Integer),
        sa.Column("hidden_by", sa.Text),
        sa.Column("hidden_reason", sa.Text),
        sa.Column("hidden_at_ms", sa.BigInteger),
    )


def _created_heads() -> sa.Table:
    return op.create_table(
        "document_heads",
        sa.Column("kind", sa.String(8), primary_key=True),
        sa.Column("name", _name(), primary_key=True),
        sa.Column("revision", sa.Integer, nullable=False),
        sa.Column("hidden", sa.Boolean, nullable=False),
        sa.ForeignKeyConstraint(
            ["kind", "name", "revision"],
            [f"document_revisions.{column}" for column in ("kind", "name", "revision")],
            name="document_heads_revision",
        ),
    )


def _bring_over(old: str, new: sa.Table, *columns: sa.ColumnElement[Any]) -> None:
    chosen = sa.select(sa.literal("arm").label("kind"), *columns).select_from(sa.table(old))
    op.get_bind().execute(new.insert().from_select(chosen.selected_columns.keys(), chosen))


def _digests() -> sa.ColumnElement[str]:
    """Return both digests of an arm as the text of one JSON object; they are hexadecimal."""
    table, setup = (sa.column(name, sa.Text) for name in ("table_digest", "setup_digest"))
    opening, between, closing = '{"table_digest":"', '","setup_digest":"', '"}'
    return sa.literal(opening) + table + sa.literal(between) + setup + sa.literal(closing)


def _name() -> sa.types.TypeEngine[str]:
    return sa.String(48).with_variant(sa.String(48, collation="C"), "postgresql")
