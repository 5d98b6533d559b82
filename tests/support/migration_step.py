"""A folder of migrations with one step more than the shipped ones, for tests of what a later release will do."""

from __future__ import annotations

from pathlib import Path

from storage.migrate import upgrade

STEP = '''
"""A step for a test."""
import sqlalchemy as sa
from alembic import op
revision = "0002"
down_revision = "0001"
FORMAT = 2
def upgrade():
    op.add_column("entry", sa.Column("colour", sa.Text()))
    {more}
def downgrade():
    raise NotImplementedError
'''


def scripts_with_a_step(folder: Path, more: str = "") -> Path:
    """The folder, made anew."""
    (folder / "versions").mkdir(parents=True)
    for shipped in (upgrade.SCRIPTS / "versions").glob("0*.py"):
        (folder / "versions" / shipped.name).write_text(shipped.read_text())
    (folder / "versions" / "0002_step.py").write_text(STEP.format(more=more))
    return folder
