export interface NavigationItem {
  label: string;
  href: string;
  current?: boolean;
}
