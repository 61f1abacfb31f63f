"""Alembic's entry point: the caller hands over a connection that is inside its own transaction."""

from alembic import context

context.configure(connection=context.config.attributes["connection"], transactional_ddl=True)
context.run_migrations()
