"""The tables as queries see them; the migrations make them."""

from __future__ import annotations

from sqlalchemy import Column, Float, Integer, MetaData, String, Table

METADATA = MetaData()

SCHEMA_VERSION = Table(
    "schema_version",
    METADATA,
    Column("number", Integer, primary_key=True),
    Column("name", String, nullable=False),
    Column("applied_at", String, nullable=False),
)

LEDGER = Table(
    "ledger",
    METADATA,
    Column("sequence", Integer, primary_key=True),
    Column("at", String, nullable=False),
    Column("actor", String, nullable=False),
    Column("kind", String, nullable=False),
    Column("facts", String, nullable=False),
    Column("previous_hash", String, nullable=False),
    Column("entry_hash", String, nullable=False),
)

ONCE = Table(
    "once",
    METADATA,
    Column("claim", String, primary_key=True),
    Column("kind", String, primary_key=True),
    Column("subject", String, primary_key=True),
    Column("sequence", Integer, nullable=False),
)

EXPORT = Table(
    "export",
    METADATA,
    Column("sha256", String, primary_key=True),
    Column("name", String, nullable=False),
    Column("size", Integer, nullable=False),
    Column("received_at", String, nullable=False),
)

REFUSAL = Table(
    "refusal",
    METADATA,
    Column("sequence", Integer, primary_key=True),
    Column("export_sha256", String),
    Column("name", String, nullable=False),
    Column("plan", String, nullable=False),
    Column("code", String, nullable=False),
    Column("text", String, nullable=False),
    Column("folder", String, nullable=False),
    Column("refused_at", String, nullable=False),
)

RUN = Table(
    "run",
    METADATA,
    Column("number", String, primary_key=True),
    Column("year", Integer, nullable=False),
    Column("serial", Integer, nullable=False),
    Column("run_key", String, nullable=False),
    Column("export_sha256", String, nullable=False),
    Column("export_name", String, nullable=False),
    Column("plan_name", String, nullable=False),
    Column("inputs", String, nullable=False),
    Column("k", Integer, nullable=False),
    Column("reason", String, nullable=False),
    Column("made_at", String, nullable=False),
    Column("ledger_sequence", Integer, nullable=False),
    Column("ledger_hash", String, nullable=False),
    Column("context_sha256", String, nullable=False),
    Column("result_sha256", String),
    Column("answers", String),
    Column("report_name", String),
    Column("report_sha256", String),
    Column("sealed_at", String),
)

MEASUREMENT = Table(
    "measurement",
    METADATA,
    Column("id", Integer, primary_key=True),
    Column("identity", String, nullable=False),
    Column("version", Integer, nullable=False),
    Column("layout", String, nullable=False),
    Column("line", String),
    Column("batch", String, nullable=False),
    Column("sample", String),
    Column("reading", String),
    Column("characteristic", String, nullable=False),
    Column("value", Float),
    Column("text", String, nullable=False),
    Column("decimals", Integer, nullable=False),
    Column("unit", String, nullable=False),
    Column("censored", String),
    Column("status", String),
    Column("time", String),
    Column("cell", String, nullable=False),
    Column("marks", String, nullable=False),
    Column("factors", String, nullable=False),
    Column("export_sha256", String, nullable=False),
    Column("number", String),
    Column("recorded_at", String, nullable=False),
)

CONTENT = Table(
    "content",
    METADATA,
    Column("export_sha256", String, primary_key=True),
    Column("layout_sha256", String, primary_key=True),
    Column("content_sha256", String, nullable=False),
)

RUN_GROUP = Table(
    "run_group",
    METADATA,
    Column("number", String, primary_key=True),
    Column("characteristic", String, primary_key=True),
    Column("line", String, primary_key=True),
    Column("batch", String, primary_key=True),
)

TRIAL = Table(
    "trial",
    METADATA,
    Column("sequence", Integer, primary_key=True),
    Column("export_sha256", String, nullable=False),
    Column("plan_name", String, nullable=False),
    Column("run_key", String, nullable=False),
)

SETTING_FILE = Table(
    "setting_file",
    METADATA,
    Column("name", String, primary_key=True),
    Column("sha256", String, nullable=False),
)
