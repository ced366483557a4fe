"""A later revision, for tests: the table of ingredients is made anew with one column more."""

import sqlalchemy as sa
from alembic import op

revision = "0003"
down_revision = "0002"
branch_labels = None
depends_on = None


def upgrade() -> None:
    with op.batch_alter_table("ingredient", recreate="always") as table:
        table.add_column(sa.Column("origin_country", sa.Text(), nullable=False, server_default=""))
