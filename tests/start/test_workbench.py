"""The workbench as ``python3 -m explorer`` serves it: to this computer only, in our colours."""

from __future__ import annotations

import http.client
import urllib.request
from urllib.parse import urlsplit

import pytest

from explorer import theme


def opened(page, url):
    page.goto(url)
    page.get_by_test_id("stSidebar").wait_for()
    page.locator("[data-testid=stApp][data-test-script-state=notRunning]").wait_for()
    page.wait_for_function("!document.querySelector('[data-testid=stSkeleton]')")
    return page


@pytest.mark.parametrize("look, colours", [("light", theme.LIGHT), ("dark", theme.DARK)])
def test_the_workbench_opens_in_the_colours_of_the_system(
    page, workbench, screenshots, look, colours
):
    page.emulate_media(color_scheme=look)
    opened(page, workbench)
    ground = page.get_by_test_id("stApp").evaluate("app => getComputedStyle(app).backgroundColor")
    assert ground == f"rgb{tuple(int(colours.background[i : i + 2], 16) for i in (1, 3, 5))}"
    assert page.get_by_test_id("stException").count() == 0
    page.screenshot(path=screenshots / f"start-{look}.png")


def test_nothing_on_the_page_offers_to_publish_it(page, workbench):
    opened(page, workbench)
    assert page.get_by_test_id("stAppDeployButton").count() == 0


def test_a_page_of_another_site_may_not_read_the_workbench(workbench):
    asked = urllib.request.Request(f"{workbench}/_stcore/health")
    asked.add_header("Origin", "http://elsewhere.example")
    with urllib.request.urlopen(asked, timeout=5) as answer:
        assert answer.headers.get("Access-Control-Allow-Origin") in (None, "")


@pytest.mark.parametrize("host, status", [("127.0.0.1", 101), ("elsewhere.example", 403)])
def test_the_live_connection_is_refused_under_another_name(workbench, host, status):
    connection = http.client.HTTPConnection(urlsplit(workbench).netloc, timeout=5)
    connection.putrequest("GET", "/_stcore/stream", skip_host=True)
    for name, value in {
        "Host": host,
        "Connection": "Upgrade",
        "Upgrade": "websocket",
        "Sec-WebSocket-Version": "13",
        "Sec-WebSocket-Key": "dGhlIHNhbXBsZSBub25jZQ==",
    }.items():
        connection.putheader(name, value)
    connection.endheaders()
    assert connection.getresponse().status == status
    connection.close()
