"""What an operator may set, from the environment (prefix FAULTLOOP_) or the command line."""

from pydantic import Field
from pydantic_settings import BaseSettings, SettingsConfigDict


class Settings(BaseSettings):
    """The service's settings; nothing is read before `create_app` is given one of these."""

    model_config = SettingsConfigDict(env_prefix="FAULTLOOP_", extra="ignore")

    database_url: str = Field(
        default="sqlite:///faultloop.sqlite3",
        description="SQLite file or PostgreSQL database in which assessments are kept",
    )
    max_body_bytes: int = Field(default=1_048_576, ge=1024, description="Largest request body read")
    max_batch_bytes: int = Field(default=16_777_216, ge=1024, description="Largest body of a batch read")
    batches_waiting: int = Field(
        default=16, ge=1, description="Batches that may wait for the worker before 503 is answered"
    )
    writer_capacity: int = Field(
        default=2048, ge=1, description="Assessments that may wait to be stored before 503 is answered"
    )
    writer_group: int = Field(default=256, ge=1, le=1000, description="Most assessments stored in one transaction")
