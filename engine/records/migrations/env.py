"""Runs the migrations on the connection that `engine.records.migrating` hands over."""

from alembic import context

from engine.records.schema import metadata

context.configure(
    connection=context.config.attributes["connection"],
    target_metadata=metadata,
    render_as_batch=True,
    transaction_per_migration=False,
)
with context.begin_transaction():
    context.run_migrations()
