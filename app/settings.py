"""Settings of the server: `settings.toml` in the data folder, overruled by GAINWORTH_… in the environment."""

from __future__ import annotations

import tomllib
from pathlib import Path

from pydantic import Field, ValidationError
from pydantic_settings import (
    BaseSettings,
    PydanticBaseSettingsSource,
    SettingsConfigDict,
    TomlConfigSettingsSource,
)

from app.errors import StoreError

FILE_NAME = "settings.toml"


class Settings(BaseSettings):
    """What may differ from one installation to the next; read once at start."""

    model_config = SettingsConfigDict(env_prefix="GAINWORTH_", extra="forbid", frozen=True)

    host: str = Field("127.0.0.1", min_length=1, description="address the server listens on")
    port: int = Field(8790, ge=0, le=65535, description="port it listens on; 0 takes a free one")
    host_names: list[str] = Field([], description="names, besides addresses and localhost, that the page is opened by")
    cache_limit_gb: float = Field(20.0, ge=1, le=10_000, description="most that decoded rasters may take on disk")
    workers: int = Field(4, ge=1, le=64, description="questions that are computed at once")
    largest_body_kb: int = Field(1024, ge=16, le=65536, description="largest request that is read")
    worth_per_multiplex: float | None = Field(None, ge=0, le=1e6, description="worth of one more wanted multiplex")
    refractivity_maps: Path | None = Field(
        None, description="folder with the full maps DN50.TXT and N050.TXT of P.453 instead of the package's table"
    )
    reading_cost: float | None = Field(None, ge=0, le=1e6, description="cost of taking a reading")

    @classmethod
    def settings_customise_sources(
        cls,
        settings_cls: type[BaseSettings],
        init_settings: PydanticBaseSettingsSource,
        env_settings: PydanticBaseSettingsSource,
        dotenv_settings: PydanticBaseSettingsSource,
        file_secret_settings: PydanticBaseSettingsSource,
    ) -> tuple[PydanticBaseSettingsSource, ...]:
        """Order of precedence: arguments, environment, the file."""
        return init_settings, env_settings, TomlConfigSettingsSource(settings_cls)


def load_settings(data_dir: Path) -> Settings:
    """Read the settings that hold for a data folder.

    Raises
    ------
    StoreError
        The file or a variable cannot be used: names it, what came and what is allowed.
    """

    class _OfFolder(Settings):
        model_config = SettingsConfigDict(toml_file=data_dir / FILE_NAME)

    path = data_dir / FILE_NAME
    try:
        return _OfFolder()
    except ValidationError as error:
        raise StoreError(_plain(error, path)) from error
    except (tomllib.TOMLDecodeError, UnicodeDecodeError, RecursionError, OSError) as error:
        raise StoreError(f"{path} cannot be read ({error}): mend it or move it away") from error


def _plain(error: ValidationError, path: Path) -> str:
    first = error.errors(include_url=False)[0]
    name = str(first["loc"][0]) if first["loc"] else ""
    known = ", ".join(Settings.model_fields)
    if first["type"] == "extra_forbidden":
        return f'{path}: "{name}" is not a setting: use {known}'
    came = first["input"]
    limits = first["msg"][:1].lower() + first["msg"][1:]
    return f"setting {name} is {came!r} in {path.name} or GAINWORTH_{name.upper()}: {limits}"
