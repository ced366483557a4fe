"""The steps that bring a mill file from one revision of the schema to the next, run by Alembic.

A step that files may have been made by never changes again. To change the schema: change schema.py, add
steps/0003_what_it_does.py with revision "0003" and down_revision "0002", and add "0003" to schema.REVISIONS. A new
column that may not be empty needs a server_default, since rows stand already. Steps run in one transaction, without
foreign keys while they run; a table that SQLite must make anew is changed in op.batch_alter_table.
"""
