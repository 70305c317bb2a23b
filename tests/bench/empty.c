/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The program that does nothing: what starting any program costs on this machine. It is
 * linked to the C library alone and owns nothing. */
int main(void)
{
    return 0;
}
