/* SPDX-License-Identifier: GPL-3.0-or-later */
#include "worth_test.h"
TCase *worth_edge_case(void)
{
    return tcase_create("edges");
}
