"""Secrecy at rest: a random data key, wrapped by a key from a passphrase; versions sealed and bound to their identity.

The passphrase goes through scrypt (n = 2^16, r = 8, p = 1, RFC 7914), the rest is AES-256 in GCM (NIST SP 800-38D).
Changing the passphrase wraps the same data key anew.
"""

from __future__ import annotations

import json
import secrets
from base64 import b64decode, b64encode

from cryptography.exceptions import InvalidTag
from cryptography.hazmat.primitives.ciphers.aead import AESGCM
from cryptography.hazmat.primitives.kdf.scrypt import Scrypt

from planner.errors import StoreError

KEY_BYTES, NONCE_BYTES, SALT_BYTES = 32, 12, 16
SCRYPT_N, SCRYPT_R, SCRYPT_P = 2**16, 8, 1
LEAST_LETTERS = 8
_WRAP = b"data key of the case file"


class WrongPassphrase(StoreError):
    """The passphrase does not open the key."""


class Seal:
    """Closes and opens contents with one data key."""

    def __init__(self, key: bytes) -> None:
        self._key = key
        self._cipher = AESGCM(key)

    def close(self, content: bytes, identity: bytes) -> bytes:
        """Sealed content, bound to the identity it is kept under."""
        nonce = secrets.token_bytes(NONCE_BYTES)
        return nonce + self._cipher.encrypt(nonce, content, identity)

    def open(self, sealed: bytes, identity: bytes) -> bytes:
        """The content. Raises StoreError when it was changed, moved to another identity, or sealed with another key."""
        try:
            return self._cipher.decrypt(sealed[:NONCE_BYTES], sealed[NONCE_BYTES:], identity)
        except (InvalidTag, ValueError) as error:
            raise StoreError("A sealed version was changed after it was saved, or does not belong here.") from error

    def wrapped(self, passphrase: str) -> bytes:
        """The data key wrapped by this passphrase, to be kept beside the cases.

        Raises StoreError for a passphrase that is too short.
        """
        if len(passphrase) < LEAST_LETTERS:
            raise StoreError(f"The passphrase has {len(passphrase)} letters; {LEAST_LETTERS} or more are needed.")
        salt = secrets.token_bytes(SALT_BYTES)
        nonce = secrets.token_bytes(NONCE_BYTES)
        key = AESGCM(_derived(passphrase, salt)).encrypt(nonce, self._key, _WRAP)
        parts = {"salt": salt, "nonce": nonce, "key": key}
        return json.dumps({name: b64encode(value).decode() for name, value in parts.items()} | {"version": 1}).encode()


def new_seal() -> Seal:
    """A seal with a new random data key."""
    return Seal(secrets.token_bytes(KEY_BYTES))


def unwrapped(wrapped: bytes, passphrase: str) -> Seal:
    """The seal that a passphrase opens. Raises WrongPassphrase, or StoreError when what was kept is damaged."""
    try:
        table = json.loads(wrapped)
        salt, nonce, key = (b64decode(table[name], validate=True) for name in ("salt", "nonce", "key"))
    except (ValueError, KeyError, TypeError) as error:
        raise StoreError("The kept key is damaged; the sealed cases cannot be opened without a copy of it.") from error
    try:
        return Seal(AESGCM(_derived(passphrase, salt)).decrypt(nonce, key, _WRAP))
    except InvalidTag as error:
        raise WrongPassphrase("The passphrase does not open the cases.") from error


def _derived(passphrase: str, salt: bytes) -> bytes:
    return Scrypt(salt=salt, length=KEY_BYTES, n=SCRYPT_N, r=SCRYPT_R, p=SCRYPT_P).derive(passphrase.encode())
