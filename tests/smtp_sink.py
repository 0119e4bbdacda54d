"""A real SMTP server in a thread: keeps what it accepts, and can refuse or stall on request."""

import asyncio
import email
import email.policy
import socket
import time
from dataclasses import dataclass
from email.message import EmailMessage
from typing import Literal

from aiosmtpd.controller import Controller
from aiosmtpd.smtp import SMTP, Envelope, Session

Stage = Literal["EHLO", "DATA", "REPLY"]


@dataclass(frozen=True)
class Received:
    """One accepted mail: the envelope's addresses and the parsed message."""

    sender: str
    recipients: tuple[str, ...]
    message: EmailMessage

    def body(self, kind: Literal["plain", "html"] = "plain") -> str:
        part = self.message.get_body((kind,))
        assert part is not None, f"the mail has no {kind} part"
        text: str = part.get_content()
        return text


class SmtpSink:
    """The mail server of the tests; the fixture `smtp_sink` hands it out emptied."""

    def __init__(self) -> None:
        self.messages: list[Received] = []
        self.attempts = 0
        self._refusals = 0
        self._reply = ""
        self._refused_addresses: dict[str, str] = {}
        self._held: set[Stage] = set()
        self.host = "127.0.0.1"
        with socket.create_server((self.host, 0)) as probe:
            self.port: int = probe.getsockname()[1]
        self._controller = Controller(self, hostname=self.host, port=self.port)
        self._controller.start()

    def refuse(self, times: int, reply: str = "451 4.3.0 Try again later") -> None:
        """Answer the next `times` mails with this reply instead of accepting them."""
        self._refusals, self._reply = times, reply

    def refuse_address(self, address: str, reply: str = "550 5.1.1 No such mailbox") -> None:
        """Answer RCPT for this address with this reply."""
        self._refused_addresses[address] = reply

    def hold(self, stage: Stage) -> None:
        """Stall until `release()`: at the greeting (EHLO), before the mail is kept (DATA), or after it is kept but
        before the sender hears so (REPLY)."""
        self._held.add(stage)

    def release(self) -> None:
        self._held.clear()

    def clear(self) -> None:
        self.release()
        self.messages, self.attempts, self._refusals = [], 0, 0
        self._refused_addresses.clear()

    def wait_for(self, count: int, timeout: float = 15.0) -> list[Received]:
        """Wait until at least `count` mails have come; fail with what has come when they do not."""
        deadline = time.monotonic() + timeout
        while len(self.messages) < count:
            subjects = [mail.message["Subject"] for mail in self.messages]
            assert time.monotonic() < deadline, f"{len(subjects)} of {count} mails came within {timeout} s: {subjects}"
            time.sleep(0.05)
        return self.messages

    def stop(self) -> None:
        self.release()
        self._controller.stop(no_assert=True)

    async def handle_EHLO(  # noqa: N802 - aiosmtpd's name
        self, server: SMTP, session: Session, envelope: Envelope, hostname: str, responses: list[str]
    ) -> list[str]:
        session.host_name = hostname
        await self._wait("EHLO")
        return responses

    async def handle_RCPT(  # noqa: N802 - aiosmtpd's name
        self, server: SMTP, session: Session, envelope: Envelope, address: str, rcpt_options: list[str]
    ) -> str:
        if address in self._refused_addresses:
            return self._refused_addresses[address]
        envelope.rcpt_tos.append(address)
        return "250 2.1.5 OK"

    async def handle_DATA(self, server: SMTP, session: Session, envelope: Envelope) -> str:  # noqa: N802 - aiosmtpd's name
        self.attempts += 1
        await self._wait("DATA")
        if self._refusals:
            self._refusals -= 1
            return self._reply
        self._keep(envelope)
        await self._wait("REPLY")
        return "250 2.0.0 Kept"

    async def _wait(self, stage: Stage) -> None:
        while stage in self._held:
            await asyncio.sleep(0.02)

    def _keep(self, envelope: Envelope) -> None:
        content = envelope.content or b""
        raw = content.encode() if isinstance(content, str) else content
        message = email.message_from_bytes(raw, policy=email.policy.default)
        self.messages.append(Received(envelope.mail_from or "", tuple(envelope.rcpt_tos), message))
