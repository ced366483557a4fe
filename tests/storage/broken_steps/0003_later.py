"""A later revision that fails half way, for tests."""

import sqlalchemy as sa
from alembic import op

revision = "0003"
down_revision = "0002"
branch_labels = None
depends_on = None


def upgrade() -> None:
    op.create_table("half_made", sa.Column("id", sa.Integer(), primary_key=True))
    op.execute("DELETE FROM value")
    raise RuntimeError("a fault in the step")
