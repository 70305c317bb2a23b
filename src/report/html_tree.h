/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The picture of a tree, for its page. */
#ifndef REPORT_HTML_TREE_H
#define REPORT_HTML_TREE_H

#include "report/html_svg.h"
#include "report/tree_list.h"

/* The nodes of l, which are those that pages show and at least one. `list`: a table with a row for
 * each of them and the columns of tree_add_columns, of which the last is that of the values. */
void html_tree_picture(struct html *h, const struct tree_list *l, const struct block *list,
                       const char *title);

#endif
