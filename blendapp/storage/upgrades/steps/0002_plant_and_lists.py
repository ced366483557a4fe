"""Plant by site, liquid meters, steps of mixing, yield; suppliers of ingredients; lists of analyses."""

import sqlalchemy as sa
from alembic import op

revision = "0002"
down_revision = "0001"
branch_labels = None
depends_on = None

# Column by table: name and what it refers to, None for a number.
_NUMBERS = {
    "scale": ("step_l", "least_l", "greatest_l"),
    "formula": ("loss_percent", "product_dry_matter_percent"),
    "lot": ("dry_matter_percent",),
}
_LINKS = (
    ("mill", "site_id", "site"),
    ("ingredient", "supplier_id", "supplier"),
    ("lot", "price_list_id", "price_list"),
    ("price_list", "site_id", "site"),
    ("batch", "mixer_id", "mixer"),
    ("quote", "replaces_id", "quote"),
)
_TEXTS = (("mill", "sheet_mass", "kg"), ("mill", "paper", "A4"), ("price_list", "about", "prices"))


def upgrade() -> None:
    op.create_table(
        "mixing_step",
        sa.Column("id", sa.Integer(), autoincrement=False, nullable=False),
        sa.Column("formula_id", sa.Integer(), nullable=True),
        sa.Column("position", sa.Integer(), nullable=False),
        sa.Column("text", sa.Text(), nullable=False),
        sa.Column("minutes", sa.Double(), nullable=True),
        sa.Column("setting", sa.Text(), nullable=False),
        sa.ForeignKeyConstraint(
            ["formula_id"], ["formula.id"], name="fk_mixing_step_formula_id", deferrable=True, initially="DEFERRED"
        ),
        sa.PrimaryKeyConstraint("id", name="pk_mixing_step"),
    )
    op.create_index("ix_mixing_step_formula_id", "mixing_step", ["formula_id"])
    for table, names in _NUMBERS.items():
        for name in names:
            op.add_column(table, sa.Column(name, sa.Double(), nullable=True))
    for table, name, default in _TEXTS:
        op.add_column(table, sa.Column(name, sa.Text(), nullable=False, server_default=default))
    op.add_column("ingredient", sa.Column("opened", sa.Boolean(), nullable=False, server_default=sa.false()))
    for table, name, target in _LINKS:
        key = f"fk_{table}_{name}"
        with op.batch_alter_table(table) as change:
            change.add_column(sa.Column(name, sa.Integer(), nullable=True))
            change.create_foreign_key(key, target, [name], ["id"], deferrable=True, initially="DEFERRED")
        op.create_index(f"ix_{table}_{name}", table, [name])
    with op.batch_alter_table("scale") as change:
        change.alter_column("step_kg", existing_type=sa.Double(), nullable=True)
