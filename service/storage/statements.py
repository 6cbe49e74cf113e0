"""What is asked of the database, each question built once, for documents of any kind.

Building one takes longer than SQLite takes to answer it, and a controller asks for the head at
every cycle. Left out: when they are asked (``sql.py``).
"""

import sqlalchemy as sa

from service.storage.schema import HEADS, KIND, NAME, REVISIONS

_KIND = sa.bindparam("kind", type_=KIND)
_NAME = sa.bindparam("name", type_=NAME)
_LIMIT = sa.bindparam("limit", type_=sa.Integer)
_THIS_HEAD = sa.and_(HEADS.c.kind == _KIND, HEADS.c.name == _NAME)
_SHOWN = sa.and_(HEADS.c.kind == _KIND, ~HEADS.c.hidden)
_THESE_REVISIONS = sa.and_(REVISIONS.c.kind == _KIND, REVISIONS.c.name == _NAME)
_OF_HEADS = sa.select(REVISIONS).join(
    HEADS,
    sa.and_(
        REVISIONS.c.kind == HEADS.c.kind,
        REVISIONS.c.name == HEADS.c.name,
        REVISIONS.c.revision == HEADS.c.revision,
    ),
)

HEAD = _OF_HEADS.where(_THIS_HEAD, ~HEADS.c.hidden)
HEAD_NUMBER = sa.select(HEADS.c.revision).where(_THIS_HEAD, ~HEADS.c.hidden)
# Others may read the head, and may not write it before this transaction is over.
HELD_NUMBER = HEAD_NUMBER.with_for_update(read=True)
LAST_NUMBER = sa.select(HEADS.c.revision).where(_THIS_HEAD).with_for_update()
REVISION = sa.select(REVISIONS).where(
    _THESE_REVISIONS, REVISIONS.c.revision == sa.bindparam("number")
)
REVISIONS_AFTER = (
    sa.select(REVISIONS)
    .where(_THESE_REVISIONS, REVISIONS.c.revision > sa.bindparam("after"))
    .order_by(REVISIONS.c.revision)
    .limit(_LIMIT)
)
HEADS_AFTER = (
    _OF_HEADS.where(_SHOWN, HEADS.c.name > sa.bindparam("after"))
    .order_by(HEADS.c.name)
    .limit(_LIMIT)
)
STANDING_IN = _OF_HEADS.where(
    _SHOWN, REVISIONS.c.cell == sa.bindparam("cell", type_=NAME)
).order_by(HEADS.c.name)
COUNT = sa.select(sa.func.count()).select_from(HEADS).where(_SHOWN)
