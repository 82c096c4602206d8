"""How a database is opened: its address, SQLite's settings, the schema brought up to date.

Knows SQLite's pitfalls and Alembic; does not know what is filed.
"""

from pathlib import Path
from typing import Any

from sqlalchemy import Connection, Engine, create_engine, event, inspect, text
from sqlalchemy.engine import URL, make_url
from sqlalchemy.exc import ArgumentError, DBAPIError, NoSuchModuleError, OperationalError, SQLAlchemyError

from filmfit.errors import RecordsError
from filmfit.records.tables import dumps

BUSY_TIMEOUT_MS = 10_000
NEWEST = "0002"  # the schema that this program writes
MIGRATION_LOCK = 0x66696C6D  # a number of filmfit's own among the server's advisory locks: "film"
READ_ONLY = {"read_only": True}


def open_engine(address: str) -> Engine:
    """Return an engine on records whose schema is this program's, making or upgrading them where needed.

    Args:
        address: a path of an SQLite file, or any SQLAlchemy URL.

    Raises:
        RecordsError: no such database, not writable, not ours, or newer than this program.
    """
    url = _url(address)
    _refuse_unwritable(url, address)
    try:
        engine = create_engine(url, json_serializer=dumps, pool_pre_ping=True)
    except (NoSuchModuleError, ImportError) as error:
        raise RecordsError(
            address, f"no driver for '{url.drivername}'", do="install it, or give a file name"
        ) from error
    if engine.dialect.name == "sqlite":
        _set_up_sqlite(engine)
    try:
        _bring_up_to_date(engine, address)
    except SQLAlchemyError as error:
        engine.dispose()
        raise told(error, address) from error
    except RecordsError:
        engine.dispose()
        raise
    return engine


def told(error: SQLAlchemyError, address: str) -> RecordsError:
    """Return a database's refusal as one sentence."""
    cause = str(error.orig) if isinstance(error, DBAPIError) and error.orig is not None else str(error)
    cause = cause.strip().splitlines()[0] if cause.strip() else type(error).__name__
    do = ""
    if "locked" in cause:
        do = "another program holds it: try again"
    elif "not a database" in cause or "malformed" in cause:
        do = "name another file, or restore a backup"
    elif isinstance(error, OperationalError):
        do = "check the address and your rights there"
    return RecordsError(address, f"the records cannot be used ({cause})", do=do)


def _url(address: str) -> URL:
    """Return the address as a URL; what is no URL is a file."""
    if not address.strip() or address in ("sqlite://", "sqlite:///:memory:"):
        raise RecordsError(address or "--records", "names no lasting records", "a file name or dialect://...")
    if "://" not in address:
        return URL.create("sqlite", database=str(Path(address)))
    try:
        return make_url(address)
    except ArgumentError as error:
        raise RecordsError(address, "is no database address", "a file name or dialect://...") from error


def _refuse_unwritable(url: URL, address: str) -> None:
    """Refuse a file that cannot be written before anything is computed."""
    if not url.drivername.startswith("sqlite") or url.database in (None, "", ":memory:"):
        return
    path = Path(str(url.database))
    if path.is_dir():
        raise RecordsError(address, "is a folder", do="name a file in it")
    if not path.parent.is_dir():
        raise RecordsError(address, f"there is no folder '{path.parent}'", do="make it, or name another file")
    try:
        if path.exists():
            with path.open("r+b") as file:
                head = file.read(16)
            if head and not head.startswith(b"SQLite format 3"):
                raise RecordsError(address, "is not a database", do="name another file with --records")
        else:
            probe = path.with_name(path.name + ".probe")
            probe.touch()
            probe.unlink()
    except OSError as error:
        raise RecordsError(address, f"cannot be written: {error.strerror}",
                           do="name another file with --records, or give --no-records") from error  # fmt: skip


def _set_up_sqlite(engine: Engine) -> None:
    """Make every connection safe for several writers: WAL, foreign keys, patience, BEGIN IMMEDIATE."""

    @event.listens_for(engine, "connect")
    def _connect(connection: Any, _: Any) -> None:
        connection.isolation_level = None
        cursor = connection.cursor()
        cursor.execute(f"PRAGMA busy_timeout={BUSY_TIMEOUT_MS}")
        cursor.execute("PRAGMA journal_mode=WAL")
        cursor.execute("PRAGMA foreign_keys=ON")
        cursor.close()

    @event.listens_for(engine, "begin")
    def _begin(connection: Connection) -> None:
        # a deferred BEGIN that turns from reading to writing fails at once when another writer was quicker
        reading = connection.get_execution_options().get("read_only", False)
        connection.exec_driver_sql("BEGIN" if reading else "BEGIN IMMEDIATE")


def _bring_up_to_date(engine: Engine, address: str) -> None:
    """Create or upgrade the schema; refuse another program's file and a newer schema."""
    with engine.connect().execution_options(**READ_ONLY) as connection:
        tables = set(inspect(connection).get_table_names())
        if tables and "filmfit_mark" not in tables:
            raise RecordsError(address, "is another program's database", do="name another file with --records")
        found = connection.execute(text("SELECT version_num FROM alembic_version")).scalar() if tables else None
    if found == NEWEST:
        return
    if found is not None and found > NEWEST:
        raise RecordsError(address, f"was written by a newer filmfit (schema {found})", f"schema {NEWEST} or older",
                           "upgrade filmfit")  # fmt: skip
    _migrate(engine)


def _migrate(engine: Engine) -> None:
    """Run the missing migrations in one transaction, foreign keys off and checked afterwards."""
    from alembic import command
    from alembic.config import Config

    config = Config()
    config.set_main_option("script_location", str(Path(__file__).parent / "migrations"))
    with engine.connect() as connection:
        sqlite = engine.dialect.name == "sqlite"
        if sqlite:
            connection.connection.cursor().execute("PRAGMA foreign_keys=OFF")
        with connection.begin():
            if engine.dialect.name == "postgresql":  # one at a time: the next one finds the schema made
                connection.exec_driver_sql(f"SELECT pg_advisory_xact_lock({MIGRATION_LOCK})")
            config.attributes["connection"] = connection
            command.upgrade(config, "head")
            if sqlite and connection.exec_driver_sql("PRAGMA foreign_key_check").first() is not None:
                raise RuntimeError("a migration left rows without what they refer to")
        if sqlite:
            connection.connection.cursor().execute("PRAGMA foreign_keys=ON")
