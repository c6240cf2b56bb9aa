"""Runs migrations on the connection that the store hands over, in its transaction."""

from alembic import context

from vanner.store.schema import metadata

connection = context.config.attributes["connection"]
context.configure(connection=connection, target_metadata=metadata, transactional_ddl=True)
context.run_migrations()
