"""The whole schema, as the first mill files have it.

Written out and not taken from schema.py, since what this step makes must never change once files made by it exist.
"""

import sqlalchemy as sa
from alembic import op

revision = "0001"
down_revision = None
branch_labels = None
depends_on = None


def _link(name: str, target: str, key: str, nullable: bool) -> sa.Column[int]:
    foreign = sa.ForeignKey(f"{target}.id", name=key, deferrable=True, initially="DEFERRED")
    return sa.Column(name, sa.Integer(), foreign, nullable=nullable)


def upgrade() -> None:
    op.create_table(
        "counter",
        sa.Column("name", sa.Text(), nullable=False),
        sa.Column("next_value", sa.Integer(), nullable=False),
        sa.PrimaryKeyConstraint("name", name="pk_counter"),
    )
    op.create_table(
        "formula",
        sa.Column("id", sa.Integer(), autoincrement=False, nullable=False),
        sa.Column("name", sa.Text(), nullable=False),
        sa.Column("amounts", sa.Text(), nullable=False),
        sa.Column("animal", sa.Text(), nullable=True),
        sa.Column("stage", sa.Text(), nullable=False),
        sa.Column("batch_kg", sa.Double(), nullable=True),
        sa.Column("admits", sa.Text(), nullable=False),
        sa.Column("note", sa.Text(), nullable=False),
        sa.PrimaryKeyConstraint("id", name="pk_formula"),
        sa.UniqueConstraint("name", name="uq_formula_name"),
    )
    op.create_table(
        "log_entry",
        sa.Column("id", sa.Integer(), nullable=False),
        sa.Column("made", sa.DateTime(timezone=True), nullable=False),
        sa.Column("who", sa.Text(), nullable=False),
        sa.Column("what", sa.Text(), nullable=False),
        sa.Column("role", sa.Text(), nullable=False),
        _link("of_id", "log_entry", "fk_log_entry_of_id", nullable=True),
        sa.PrimaryKeyConstraint("id", name="pk_log_entry"),
        sqlite_autoincrement=True,
    )
    op.create_index("ix_log_entry_of_id", "log_entry", ["of_id"])
    op.create_table(
        "mill",
        sa.Column("id", sa.Integer(), autoincrement=False, nullable=False),
        sa.Column("name", sa.Text(), nullable=False),
        sa.Column("currency", sa.Text(), nullable=False),
        sa.Column("ton_means", sa.Text(), nullable=False),
        sa.Column("cwt_means", sa.Text(), nullable=False),
        sa.Column("one_person_approves", sa.Boolean(), nullable=False),
        sa.PrimaryKeyConstraint("id", name="pk_mill"),
        sa.CheckConstraint("id = 1", name="ck_mill_ck_mill_one_mill"),
    )
    op.create_table(
        "nutrient",
        sa.Column("id", sa.Integer(), autoincrement=False, nullable=False),
        sa.Column("name", sa.Text(), nullable=False),
        sa.Column("unit", sa.Text(), nullable=False),
        sa.Column("never_negative", sa.Boolean(), nullable=False),
        sa.Column("key", sa.Text(), nullable=False),
        sa.Column("note", sa.Text(), nullable=False),
        sa.PrimaryKeyConstraint("id", name="pk_nutrient"),
        sa.UniqueConstraint("name", name="uq_nutrient_name"),
    )
    op.create_table(
        "person",
        sa.Column("id", sa.Integer(), autoincrement=False, nullable=False),
        sa.Column("name", sa.Text(), nullable=False),
        sa.Column("capacity", sa.Text(), nullable=False),
        sa.Column("password_hash", sa.Text(), nullable=False),
        sa.Column("active", sa.Boolean(), nullable=False),
        sa.PrimaryKeyConstraint("id", name="pk_person"),
        sa.UniqueConstraint("name", name="uq_person_name"),
    )
    op.create_table(
        "site",
        sa.Column("id", sa.Integer(), autoincrement=False, nullable=False),
        sa.Column("name", sa.Text(), nullable=False),
        sa.PrimaryKeyConstraint("id", name="pk_site"),
        sa.UniqueConstraint("name", name="uq_site_name"),
    )
    op.create_table(
        "supplier",
        sa.Column("id", sa.Integer(), autoincrement=False, nullable=False),
        sa.Column("name", sa.Text(), nullable=False),
        sa.Column("note", sa.Text(), nullable=False),
        sa.PrimaryKeyConstraint("id", name="pk_supplier"),
        sa.UniqueConstraint("name", name="uq_supplier_name"),
    )
    op.create_table(
        "batch",
        sa.Column("id", sa.Integer(), autoincrement=False, nullable=False),
        sa.Column("number", sa.Integer(), nullable=False),
        _link("formula_id", "formula", "fk_batch_formula_id", nullable=False),
        sa.Column("version", sa.Text(), nullable=False),
        sa.Column("order_kg", sa.Double(), nullable=False),
        sa.Column("printed", sa.DateTime(timezone=True), nullable=False),
        sa.Column("printed_by", sa.Text(), nullable=False),
        sa.Column("accepted_reason", sa.Text(), nullable=False),
        sa.Column("accepted_by", sa.Text(), nullable=False),
        sa.Column("sheet", sa.Text(), nullable=False),
        sa.Column("copies", sa.Integer(), nullable=False),
        sa.PrimaryKeyConstraint("id", name="pk_batch"),
        sa.UniqueConstraint("number", name="uq_batch_number"),
    )
    op.create_index("ix_batch_formula_id", "batch", ["formula_id"])
    op.create_table(
        "limit",
        sa.Column("id", sa.Integer(), autoincrement=False, nullable=False),
        _link("formula_id", "formula", "fk_limit_formula_id", nullable=False),
        sa.Column("kind", sa.Text(), nullable=False),
        sa.Column("subject", sa.Text(), nullable=False),
        sa.Column("per", sa.Text(), nullable=True),
        sa.Column("minimum", sa.Double(), nullable=True),
        sa.Column("maximum", sa.Double(), nullable=True),
        sa.Column("unit", sa.Text(), nullable=False),
        sa.Column("basis", sa.Text(), nullable=False),
        sa.Column("at_dry_matter_percent", sa.Double(), nullable=True),
        sa.Column("note", sa.Text(), nullable=False),
        sa.PrimaryKeyConstraint("id", name="pk_limit"),
    )
    op.create_index("ix_limit_formula_id", "limit", ["formula_id"])
    op.create_table(
        "log_change",
        _link("entry_id", "log_entry", "fk_log_change_entry_id", nullable=False),
        sa.Column("position", sa.Integer(), nullable=False),
        sa.Column("kind", sa.Text(), nullable=False),
        sa.Column("record_id", sa.Integer(), nullable=False),
        sa.Column("before", sa.Text(), nullable=True),
        sa.Column("after", sa.Text(), nullable=True),
        sa.PrimaryKeyConstraint("entry_id", "position", name="pk_log_change"),
    )
    op.create_table(
        "mixer",
        sa.Column("id", sa.Integer(), autoincrement=False, nullable=False),
        sa.Column("name", sa.Text(), nullable=False),
        sa.Column("least_kg", sa.Double(), nullable=True),
        sa.Column("greatest_kg", sa.Double(), nullable=True),
        _link("site_id", "site", "fk_mixer_site_id", nullable=True),
        sa.PrimaryKeyConstraint("id", name="pk_mixer"),
        sa.UniqueConstraint("name", name="uq_mixer_name"),
    )
    op.create_index("ix_mixer_site_id", "mixer", ["site_id"])
    op.create_table(
        "price_list",
        sa.Column("id", sa.Integer(), autoincrement=False, nullable=False),
        sa.Column("file_name", sa.Text(), nullable=False),
        sa.Column("digest", sa.Text(), nullable=False),
        sa.Column("applied", sa.DateTime(timezone=True), nullable=False),
        sa.Column("rows", sa.Integer(), nullable=False),
        sa.Column("accepted", sa.Integer(), nullable=False),
        _link("supplier_id", "supplier", "fk_price_list_supplier_id", nullable=True),
        sa.Column("report", sa.Text(), nullable=False),
        sa.Column("source", sa.Text(), nullable=False),
        sa.Column("withdrawn", sa.DateTime(timezone=True), nullable=True),
        sa.PrimaryKeyConstraint("id", name="pk_price_list"),
    )
    op.create_index("ix_price_list_supplier_id", "price_list", ["supplier_id"])
    op.create_table(
        "scale",
        sa.Column("id", sa.Integer(), autoincrement=False, nullable=False),
        sa.Column("name", sa.Text(), nullable=False),
        sa.Column("step_kg", sa.Double(), nullable=False),
        sa.Column("least_kg", sa.Double(), nullable=True),
        sa.Column("greatest_kg", sa.Double(), nullable=True),
        sa.Column("tolerance_percent", sa.Double(), nullable=True),
        sa.Column("hand_add", sa.Boolean(), nullable=False),
        _link("site_id", "site", "fk_scale_site_id", nullable=True),
        sa.PrimaryKeyConstraint("id", name="pk_scale"),
        sa.UniqueConstraint("name", name="uq_scale_name"),
    )
    op.create_index("ix_scale_site_id", "scale", ["site_id"])
    op.create_table(
        "version",
        sa.Column("id", sa.Integer(), autoincrement=False, nullable=False),
        _link("formula_id", "formula", "fk_version_formula_id", nullable=False),
        sa.Column("number", sa.Integer(), nullable=False),
        sa.Column("state", sa.Text(), nullable=False),
        sa.Column("snapshot", sa.Text(), nullable=False),
        sa.Column("made", sa.DateTime(timezone=True), nullable=False),
        sa.Column("made_by", sa.Text(), nullable=False),
        _link("made_by_id", "person", "fk_version_made_by_id", nullable=True),
        sa.Column("approved", sa.DateTime(timezone=True), nullable=True),
        sa.Column("approved_by", sa.Text(), nullable=False),
        _link("approved_by_id", "person", "fk_version_approved_by_id", nullable=True),
        sa.Column("capacity", sa.Text(), nullable=False),
        sa.Column("note", sa.Text(), nullable=False),
        sa.Column("seal", sa.Text(), nullable=False),
        sa.PrimaryKeyConstraint("id", name="pk_version"),
        sa.UniqueConstraint("formula_id", "number", name="uq_version_formula_id_number"),
    )
    op.create_index("ix_version_approved_by_id", "version", ["approved_by_id"])
    op.create_index("ix_version_formula_id", "version", ["formula_id"])
    op.create_index("ix_version_made_by_id", "version", ["made_by_id"])
    op.create_table(
        "acknowledgement",
        sa.Column("id", sa.Integer(), autoincrement=False, nullable=False),
        _link("version_id", "version", "fk_acknowledgement_version_id", nullable=False),
        sa.Column("caution", sa.Text(), nullable=False),
        sa.Column("reason", sa.Text(), nullable=False),
        _link("person_id", "person", "fk_acknowledgement_person_id", nullable=False),
        sa.Column("made", sa.DateTime(timezone=True), nullable=False),
        sa.Column("by", sa.Text(), nullable=False),
        sa.PrimaryKeyConstraint("id", name="pk_acknowledgement"),
    )
    op.create_index("ix_acknowledgement_person_id", "acknowledgement", ["person_id"])
    op.create_index("ix_acknowledgement_version_id", "acknowledgement", ["version_id"])
    op.create_table(
        "ingredient",
        sa.Column("id", sa.Integer(), autoincrement=False, nullable=False),
        sa.Column("name", sa.Text(), nullable=False),
        sa.Column("class_name", sa.Text(), nullable=False),
        sa.Column("dry_matter_percent", sa.Double(), nullable=True),
        sa.Column("basis", sa.Text(), nullable=False),
        sa.Column("code", sa.Text(), nullable=False),
        _link("scale_id", "scale", "fk_ingredient_scale_id", nullable=True),
        sa.Column("stock_kg", sa.Double(), nullable=True),
        sa.Column("density_kg_per_l", sa.Double(), nullable=True),
        sa.Column("bushel_lb", sa.Double(), nullable=True),
        sa.Column("tags", sa.Text(), nullable=False),
        _link("made_by_formula_id", "formula", "fk_ingredient_made_by_formula_id", nullable=True),
        sa.Column("drug", sa.Text(), nullable=False),
        sa.Column("drug_level", sa.Text(), nullable=False),
        sa.Column("drug_species", sa.Text(), nullable=False),
        sa.Column("withdrawal", sa.Text(), nullable=False),
        sa.Column("note", sa.Text(), nullable=False),
        sa.PrimaryKeyConstraint("id", name="pk_ingredient"),
        sa.UniqueConstraint("name", name="uq_ingredient_name"),
    )
    op.create_index("ix_ingredient_made_by_formula_id", "ingredient", ["made_by_formula_id"])
    op.create_index("ix_ingredient_scale_id", "ingredient", ["scale_id"])
    op.create_table(
        "lot",
        sa.Column("id", sa.Integer(), autoincrement=False, nullable=False),
        _link("ingredient_id", "ingredient", "fk_lot_ingredient_id", nullable=False),
        sa.Column("name", sa.Text(), nullable=False),
        sa.Column("received", sa.Date(), nullable=True),
        sa.Column("mass_kg", sa.Double(), nullable=True),
        _link("supplier_id", "supplier", "fk_lot_supplier_id", nullable=True),
        sa.Column("note", sa.Text(), nullable=False),
        sa.PrimaryKeyConstraint("id", name="pk_lot"),
    )
    op.create_index("ix_lot_ingredient_id", "lot", ["ingredient_id"])
    op.create_index("ix_lot_supplier_id", "lot", ["supplier_id"])
    op.create_table(
        "quote",
        sa.Column("id", sa.Integer(), autoincrement=False, nullable=False),
        _link("ingredient_id", "ingredient", "fk_quote_ingredient_id", nullable=False),
        sa.Column("price", sa.Double(), nullable=True),
        sa.Column("per", sa.Text(), nullable=False),
        sa.Column("bushel_lb", sa.Double(), nullable=True),
        _link("site_id", "site", "fk_quote_site_id", nullable=True),
        _link("supplier_id", "supplier", "fk_quote_supplier_id", nullable=True),
        sa.Column("kind", sa.Text(), nullable=False),
        sa.Column("terms", sa.Text(), nullable=True),
        sa.Column("valid_from", sa.Date(), nullable=True),
        sa.Column("valid_to", sa.Date(), nullable=True),
        sa.Column("recorded", sa.Date(), nullable=True),
        sa.Column("source", sa.Text(), nullable=False),
        sa.Column("entered", sa.Text(), nullable=False),
        _link("price_list_id", "price_list", "fk_quote_price_list_id", nullable=True),
        sa.Column("price_per_t", sa.Double(), nullable=True),
        sa.PrimaryKeyConstraint("id", name="pk_quote"),
    )
    op.create_index("ix_quote_ingredient_id", "quote", ["ingredient_id"])
    op.create_index("ix_quote_price_list_id", "quote", ["price_list_id"])
    op.create_index("ix_quote_site_id", "quote", ["site_id"])
    op.create_index("ix_quote_supplier_id", "quote", ["supplier_id"])
    op.create_table(
        "synonym",
        sa.Column("id", sa.Integer(), autoincrement=False, nullable=False),
        sa.Column("source", sa.Text(), nullable=False),
        sa.Column("name", sa.Text(), nullable=False),
        _link("ingredient_id", "ingredient", "fk_synonym_ingredient_id", nullable=True),
        sa.Column("per", sa.Text(), nullable=False),
        sa.Column("asked", sa.Text(), nullable=False),
        sa.Column("answer", sa.Text(), nullable=False),
        sa.Column("rate", sa.Double(), nullable=True),
        sa.Column("given", sa.Date(), nullable=True),
        sa.PrimaryKeyConstraint("id", name="pk_synonym"),
    )
    op.create_index("ix_synonym_ingredient_id", "synonym", ["ingredient_id"])
    op.create_table(
        "value",
        sa.Column("id", sa.Integer(), autoincrement=False, nullable=False),
        _link("ingredient_id", "ingredient", "fk_value_ingredient_id", nullable=False),
        _link("nutrient_id", "nutrient", "fk_value_nutrient_id", nullable=False),
        sa.Column("amount", sa.Double(), nullable=False),
        sa.Column("unit", sa.Text(), nullable=False),
        sa.Column("basis", sa.Text(), nullable=False),
        sa.Column("origin", sa.Text(), nullable=True),
        sa.Column("source", sa.Text(), nullable=False),
        sa.Column("date", sa.Date(), nullable=True),
        sa.Column("n", sa.Integer(), nullable=True),
        sa.Column("sd", sa.Double(), nullable=True),
        sa.Column("entered", sa.Text(), nullable=False),
        sa.Column("canonical", sa.Double(), nullable=False),
        sa.PrimaryKeyConstraint("id", name="pk_value"),
        sa.UniqueConstraint("ingredient_id", "nutrient_id", name="uq_value_ingredient_id_nutrient_id"),
    )
    op.create_index("ix_value_ingredient_id", "value", ["ingredient_id"])
    op.create_index("ix_value_nutrient_id", "value", ["nutrient_id"])
    op.create_table(
        "bin",
        sa.Column("id", sa.Integer(), autoincrement=False, nullable=False),
        sa.Column("name", sa.Text(), nullable=False),
        _link("ingredient_id", "ingredient", "fk_bin_ingredient_id", nullable=True),
        _link("lot_id", "lot", "fk_bin_lot_id", nullable=True),
        _link("site_id", "site", "fk_bin_site_id", nullable=True),
        sa.PrimaryKeyConstraint("id", name="pk_bin"),
    )
    op.create_index("ix_bin_ingredient_id", "bin", ["ingredient_id"])
    op.create_index("ix_bin_lot_id", "bin", ["lot_id"])
    op.create_index("ix_bin_site_id", "bin", ["site_id"])
    op.create_table(
        "lot_value",
        sa.Column("id", sa.Integer(), autoincrement=False, nullable=False),
        _link("lot_id", "lot", "fk_lot_value_lot_id", nullable=False),
        _link("nutrient_id", "nutrient", "fk_lot_value_nutrient_id", nullable=False),
        sa.Column("amount", sa.Double(), nullable=False),
        sa.Column("unit", sa.Text(), nullable=False),
        sa.Column("basis", sa.Text(), nullable=False),
        sa.Column("source", sa.Text(), nullable=False),
        sa.Column("date", sa.Date(), nullable=True),
        sa.Column("canonical", sa.Double(), nullable=False),
        sa.PrimaryKeyConstraint("id", name="pk_lot_value"),
    )
    op.create_index("ix_lot_value_lot_id", "lot_value", ["lot_id"])
    op.create_index("ix_lot_value_nutrient_id", "lot_value", ["nutrient_id"])

    if op.get_context().dialect.name == "sqlite":
        for table in ("log_entry", "log_change"):
            for verb in ("UPDATE", "DELETE"):
                op.execute(
                    f"CREATE TRIGGER {table}_no_{verb.lower()} BEFORE {verb} ON {table} "
                    "BEGIN SELECT RAISE(ABORT, 'the change log is only added to'); END"
                )
