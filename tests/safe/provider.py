"""A sign-in service for tests on this machine: OpenID Connect's code flow with signed tokens, by Authlib.

OpenID Connect Core 1.0, sections 3.1 (authorization code flow) and 5.1 (standard claims); Discovery 1.0.
"""

import json
import secrets
import threading
import time
from http.server import BaseHTTPRequestHandler, ThreadingHTTPServer
from typing import Any
from urllib.parse import parse_qs, urlencode, urlsplit

from authlib.oauth2.rfc7636 import create_s256_code_challenge
from joserfc import jwt
from joserfc.jwk import RSAKey

CLIENT = "hithe-test"
SECRET = "a secret of the test client"


class Provider:
    """The service and its people. `people` maps an address to further claims of its tokens.

    `wrong_key`: sign with a key that is not published; `seen`: what browsers and the desk asked for.
    """

    def __init__(self, port: int = 0) -> None:
        self.people: dict[str, dict[str, Any]] = {}
        self.codes: dict[str, dict[str, str]] = {}
        self.seen: list[str] = []
        self.key = RSAKey.generate_key(2048, {"kid": "one", "use": "sig", "alg": "RS256"})
        self.other_key = RSAKey.generate_key(2048, {"kid": "one", "use": "sig", "alg": "RS256"})
        self.wrong_key = False
        provider = self

        class Handler(BaseHTTPRequestHandler):
            def log_message(self, *_: object) -> None:
                pass

            def do_GET(self) -> None:
                provider.get(self)

            def do_POST(self) -> None:
                provider.post(self)

        self.server = ThreadingHTTPServer(("127.0.0.1", port), Handler)
        self.issuer = f"http://127.0.0.1:{self.server.server_address[1]}"
        threading.Thread(target=self.server.serve_forever, daemon=True).start()

    @property
    def metadata_url(self) -> str:
        return f"{self.issuer}/.well-known/openid-configuration"

    def close(self) -> None:
        self.server.shutdown()
        self.server.server_close()

    def get(self, asked: BaseHTTPRequestHandler) -> None:
        parts = urlsplit(asked.path)
        query = {name: values[0] for name, values in parse_qs(parts.query).items()}
        self.seen.append(parts.path)
        if parts.path == "/.well-known/openid-configuration":
            self._json(asked, self._metadata())
        elif parts.path == "/keys":
            self._json(asked, {"keys": [self.key.as_dict(private=False)]})
        elif parts.path == "/authorize":
            links = "".join(
                f'<li><a href="/chosen?{urlencode({**query, "who": who})}">{who}</a></li>'
                for who in self.people
            )
            self._page(asked, f"<h1>Who are you?</h1><ul>{links}</ul>")
        elif parts.path == "/chosen":
            code = secrets.token_urlsafe(24)
            self.codes[code] = query
            self._redirect(asked, query["redirect_uri"], {"code": code, "state": query["state"]})
        elif parts.path == "/end":
            self._redirect(asked, query["post_logout_redirect_uri"], {})
        else:
            asked.send_error(404)

    def post(self, asked: BaseHTTPRequestHandler) -> None:
        self.seen.append(asked.path)
        length = int(asked.headers.get("Content-Length", 0))
        form = {name: values[0] for name, values in parse_qs(asked.rfile.read(length).decode()).items()}
        code = self.codes.pop(form.get("code", ""), None)
        if asked.path != "/token" or code is None or not self._client(asked, form) or not _pkce(code, form):
            self._json(asked, {"error": "invalid_grant"}, 400)
            return
        now, who = int(time.time()), code["who"]
        claims = {
            "iss": self.issuer, "aud": CLIENT, "sub": f"sub-{who}", "iat": now, "exp": now + 600,
            "nonce": code.get("nonce"), "email": who, "email_verified": True, **self.people[who],
        }  # fmt: skip
        key = self.other_key if self.wrong_key else self.key
        token = jwt.encode({"alg": "RS256", "kid": "one"}, claims, key)
        self._json(
            asked,
            {
                "access_token": secrets.token_urlsafe(16),
                "token_type": "Bearer",
                "expires_in": 600,
                "id_token": token,
            },
        )

    def _metadata(self) -> dict[str, Any]:
        return {
            "issuer": self.issuer,
            "authorization_endpoint": f"{self.issuer}/authorize",
            "token_endpoint": f"{self.issuer}/token",
            "jwks_uri": f"{self.issuer}/keys",
            "end_session_endpoint": f"{self.issuer}/end",
            "response_types_supported": ["code"],
            "subject_types_supported": ["public"],
            "id_token_signing_alg_values_supported": ["RS256"],
            "code_challenge_methods_supported": ["S256"],
        }

    @staticmethod
    def _client(asked: BaseHTTPRequestHandler, form: dict[str, str]) -> bool:
        from base64 import b64decode
        from urllib.parse import unquote_plus

        kind, _, said = asked.headers.get("Authorization", "").partition(" ")
        if kind == "Basic":
            name, _, secret = b64decode(said).decode().partition(":")
            return (unquote_plus(name), unquote_plus(secret)) == (CLIENT, SECRET) or (name, secret) == (
                CLIENT,
                SECRET,
            )
        return (form.get("client_id"), form.get("client_secret")) == (CLIENT, SECRET)

    @staticmethod
    def _json(asked: BaseHTTPRequestHandler, said: dict[str, Any], status: int = 200) -> None:
        _answer(asked, status, "application/json", json.dumps(said).encode())

    @staticmethod
    def _page(asked: BaseHTTPRequestHandler, html: str) -> None:
        _answer(asked, 200, "text/html", f"<!doctype html><title>Test</title>{html}".encode())

    @staticmethod
    def _redirect(asked: BaseHTTPRequestHandler, address: str, query: dict[str, str]) -> None:
        asked.send_response(302)
        asked.send_header("Location", f"{address}?{urlencode(query)}" if query else address)
        asked.send_header("Content-Length", "0")
        asked.end_headers()


def _pkce(code: dict[str, str], form: dict[str, str]) -> bool:
    """RFC 7636: whoever takes the code is who asked for it."""
    return create_s256_code_challenge(form.get("code_verifier", "")) == code.get("code_challenge")


def _answer(asked: BaseHTTPRequestHandler, status: int, kind: str, body: bytes) -> None:
    asked.send_response(status)
    asked.send_header("Content-Type", kind)
    asked.send_header("Content-Length", str(len(body)))
    asked.end_headers()
    asked.wfile.write(body)
