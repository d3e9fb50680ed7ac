"""${message}.

Revision ${up_revision}, after ${down_revision | comma,n}.
"""

# House rules:
# - Number the revision by the next four digits (alembic revision --rev-id 0002 ...) and append it
#   to REVISIONS in chooser/stock/revision.py.
# - Nothing is lost: every row of every table is still there afterwards. Upgrades only go forward;
#   the way back is the copy that chooser makes before it upgrades.
# - Foreign keys are off while this runs and are checked afterwards. Never turn them on here: a
#   rebuilt table would take its children with it.
# - Name every constraint, CHECKs above all: batch rebuilds drop unnamed ones in silence.
# - Tables stay STRICT (sqlite_strict=True) with TEXT, INTEGER and REAL columns only.
# - A batch rebuild drops triggers: create those of 0001 anew on a table you rebuild.
# - No import from chooser: a revision has to do the same thing years from now.
# - No commit, no PRAGMA: all revisions share one transaction.

from __future__ import annotations

import sqlalchemy as sa
from alembic import op
${imports if imports else ""}
revision = ${repr(up_revision)}
down_revision = ${repr(down_revision)}
branch_labels = ${repr(branch_labels)}
depends_on = ${repr(depends_on)}


def upgrade() -> None:
    ${upgrades if upgrades else "pass"}
