/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A policy as a table of its cells. Owns nothing. */
#include "report/html_svg.h"
#include "report/policy_plane.h"

void html_policy(struct html *h, const struct block *b, const char *id)
{
    html_open_figure(h, b, id);
    if (policy_is_whole(b->policy))
        html_table(h, policy_data(h->page.arena, b->policy), NULL, NULL, NULL);
    else
        html_raw(h, "<p>(no cells)</p>\n");
    html_raw(h, "</figure>\n");
}
