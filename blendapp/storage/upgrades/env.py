"""Where Alembic runs the steps: on the connection that upgrading.upgrade hands over, in its transaction."""

from alembic import context

from blendapp.storage.schema import metadata

attributes = context.config.attributes
if context.is_offline_mode():
    context.configure(dialect_name=attributes["dialect"], target_metadata=metadata)
else:
    context.configure(
        connection=attributes["connection"], target_metadata=metadata, render_as_batch=True, transactional_ddl=True
    )

with context.begin_transaction():
    context.run_migrations()
