"""The same library for Arduino, PlatformIO, Zephyr and plain CMake, from one description."""

from __future__ import annotations

import json
from collections.abc import Sequence
from dataclasses import dataclass


@dataclass(frozen=True)
class Library:
    """What every build system wants to know."""

    name: str  # with underscores: C prefix, CMake target
    version: str
    says: str
    headers: tuple[str, ...]  # in src/
    sources: tuple[str, ...]  # in src/


def manifests(library: Library) -> dict[str, str]:
    """Return each manifest's text by its path in the library."""
    return {
        "library.properties": _arduino(library),
        "library.json": _platformio(library),
        "CMakeLists.txt": _cmake(library),
        "zephyr/module.yml": f"name: {library.name}\nbuild:\n  cmake: zephyr\n  kconfig: zephyr/Kconfig\n",
        "zephyr/Kconfig": _kconfig(library),
        "zephyr/CMakeLists.txt": _zephyr(library),
    }


def _arduino(library: Library) -> str:
    return "\n".join(
        [
            f"name={library.name}",
            f"version={library.version}",
            "author=written by balance-assist",
            "maintainer=the owner of the design",
            f"sentence={library.says}",
            "paragraph=Portable C99, no heap, no globals.",
            "category=Device Control",
            "url=",
            "architectures=*",
            f"includes={library.headers[0]}",
            "",
        ]
    )


def _platformio(library: Library) -> str:
    return (
        json.dumps(
            {
                "name": library.name,
                "version": library.version,
                "description": library.says,
                "headers": list(library.headers),
                "frameworks": "*",
                "platforms": "*",
                "build": {"srcDir": "src", "includeDir": "src"},
            },
            indent=2,
        )
        + "\n"
    )


def _files(names: Sequence[str], folder: str) -> str:
    return "\n".join(f"  {folder}/{name}" for name in names)


def _cmake(library: Library) -> str:
    return f"""cmake_minimum_required(VERSION 3.13)
project({library.name} C)
add_library({library.name} STATIC
{_files(library.sources, "src")})
target_include_directories({library.name} PUBLIC src)
set_target_properties({library.name} PROPERTIES C_STANDARD 99 C_EXTENSIONS OFF)
"""


def _kconfig(library: Library) -> str:
    return f'config {library.name.upper()}\n\tbool "{library.says}"\n'


def _zephyr(library: Library) -> str:
    return f"""if(CONFIG_{library.name.upper()})
  zephyr_include_directories(../src)
  zephyr_library()
  zephyr_library_sources(
{_files(library.sources, "  ../src")})
endif()
"""
