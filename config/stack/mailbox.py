"""A mail catcher for trying things out: it accepts every mail over SMTP and keeps it as a file. It delivers nothing."""

import asyncio
import secrets
import socket
import time
from pathlib import Path

from aiosmtpd.smtp import SMTP, Envelope, Session


class FileBox:
    """Writes each accepted mail to one .eml file, named so that a listing is in order of arrival."""

    def __init__(self, folder: Path) -> None:
        self.folder = folder

    async def handle_DATA(self, server: SMTP, session: Session, envelope: Envelope) -> str:  # noqa: N802 - aiosmtpd's name
        name = f"{time.strftime('%Y%m%d-%H%M%S', time.gmtime())}-{secrets.token_hex(4)}"
        content = envelope.content or b""
        fresh = self.folder / f".{name}"
        fresh.write_bytes(content.encode() if isinstance(content, str) else content)
        fresh.rename(self.folder / f"{name}.eml")
        return "250 Kept"


async def _serve(listens: socket.socket, folder: Path) -> None:
    loop = asyncio.get_running_loop()
    server = await loop.create_server(lambda: SMTP(FileBox(folder), loop=loop), sock=listens)
    async with server:
        await server.serve_forever()


def serve(listens: socket.socket, folder: Path) -> None:
    folder.mkdir(parents=True, exist_ok=True)
    asyncio.run(_serve(listens, folder))
